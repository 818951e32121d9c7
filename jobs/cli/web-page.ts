import { existsSync } from 'node:fs';
import { rename, rm } from 'node:fs/promises';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Terminal } from './terminal.ts';

const pathTo = (relative: string): string => fileURLToPath(new URL(relative, import.meta.url));
const isBuilt = (folder: string): boolean => existsSync(join(folder, 'index.html'));

/**
 * Folder of the built page. Beside the built command it is there; from the sources it is built once when missing.
 * Undefined when it can be neither found nor built: the API works without it.
 */
export async function findWebPage(terminal: Terminal): Promise<string | undefined> {
  const beside = pathTo('./web');
  if (isBuilt(beside)) return beside;
  const fromSources = pathTo('../../dist/web');
  if (isBuilt(fromSources)) return fromSources;
  const configFile = pathTo('../../web/vite.config.ts');
  if (!existsSync(configFile)) return undefined;
  terminal.note('building the page, once …');
  const { build } = await import('vite');
  // Built beside its place and renamed, so that of two processes that start together neither sees half a page.
  const outDir = `${fromSources}-${process.pid}`;
  await build({ configFile, logLevel: 'error', build: { outDir } });
  await rename(outDir, fromSources).catch(async (error) => {
    await rm(outDir, { recursive: true, force: true });
    if (!isBuilt(fromSources)) throw error;
  });
  return fromSources;
}
