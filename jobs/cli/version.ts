import { existsSync, readFileSync } from 'node:fs';

/** Two folders up from the sources, one from the built file. */
const found = ['../../package.json', '../package.json']
  .map((path) => new URL(path, import.meta.url))
  .find((url) => existsSync(url) && JSON.parse(readFileSync(url, 'utf8')).name === 'ratespan');

export const VERSION: string = found ? JSON.parse(readFileSync(found, 'utf8')).version : 'unknown';
