import { existsSync } from 'node:fs';
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
  await build({ configFile, logLevel: 'error' });
  return fromSources;
}
