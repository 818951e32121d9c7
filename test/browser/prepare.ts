import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { build } from 'vite';
import type { TestProject } from 'vitest/node';

declare module 'vitest' {
  export interface ProvidedContext {
    /** Folder of the page, built from the sources once for all browser tests */
    webDir: string;
  }
}

/** Runs only where a browser test is to run. */
export default async function prepare(project: TestProject): Promise<() => Promise<void>> {
  const webDir = await mkdtemp(join(tmpdir(), 'ratespan-web-'));
  const configFile = fileURLToPath(new URL('../../web/vite.config.ts', import.meta.url));
  await build({ configFile, logLevel: 'error', build: { outDir: webDir } });
  project.provide('webDir', webDir);
  return () => rm(webDir, { recursive: true, force: true });
}
