import { execFileSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { build } from 'esbuild';
import type { StudyOptions } from './registry.ts';

/** The reader and the maker of the files alone, bundled, in a process of their own: its memory is theirs and the runtime's. */
export async function mutatedFilesStudy({ count = 20_000, seed }: StudyOptions): Promise<string> {
  const folder = mkdtempSync(join(tmpdir(), 'mutated-files-'));
  try {
    const outfile = join(folder, 'study.mjs');
    const entry = fileURLToPath(new URL('./read-mutated.ts', import.meta.url));
    const contents = `import { readMutatedFiles } from ${JSON.stringify(entry)};\nprocess.stdout.write(readMutatedFiles(${count}, ${JSON.stringify(seed)}));`;
    const stdin = { contents, resolveDir: folder, loader: 'ts' } as const;
    await build({ stdin, bundle: true, platform: 'node', format: 'esm', outfile, logLevel: 'silent', minify: true });
    return execFileSync(process.execPath, [outfile], { encoding: 'utf8', maxBuffer: 1e7 });
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}
