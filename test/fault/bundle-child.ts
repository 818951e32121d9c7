import { randomBytes } from 'node:crypto';
import { cp, rm } from 'node:fs/promises';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { build } from 'esbuild';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));

/** A test process as one file, so that it starts quickly. It lies within the project, where its packages are found. */
export async function bundleChild(entry: string): Promise<{ file: string; remove(): Promise<void> }> {
  const folder = join(ROOT, 'node_modules/.cache/ratespan-fault', randomBytes(6).toString('hex'));
  const file = join(folder, 'run/child.mjs');
  await build({
    entryPoints: [join(ROOT, 'test/fault', entry)],
    bundle: true,
    platform: 'node',
    format: 'esm',
    target: 'node20',
    packages: 'external',
    outfile: file,
  });
  await cp(join(ROOT, 'schema/migrations'), join(folder, 'schema/migrations'), { recursive: true });
  return { file, remove: () => rm(folder, { recursive: true, force: true }) };
}
