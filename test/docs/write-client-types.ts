import { spawnSync } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { createApp } from '../../api/app.ts';
import type { Ports } from '../../jobs/ports/index.ts';
import { clientTypes } from './client-types.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const FILE = 'api/client-types.ts';

/** The types as they should be, laid out as the project lays out its code. No route is called, so no ports are needed. */
export async function wantedClientTypes(): Promise<string> {
  const app = createApp({ clock: { now: () => 0 } } as Ports, { access: { port: () => 80 } });
  const answer = await app.request('http://localhost/v1/openapi.json', { headers: { host: 'localhost:80' } });
  const format = spawnSync('npx', ['biome', 'format', '--config-path=test/lint.json', `--stdin-file-path=${FILE}`], {
    cwd: root,
    input: clientTypes(await answer.json()),
    encoding: 'utf8',
  });
  if (format.status !== 0) throw new Error(format.stderr);
  return format.stdout;
}

export const writtenClientTypes = (): string => readFileSync(`${root}/${FILE}`, 'utf8');

if (process.argv[1] === fileURLToPath(import.meta.url)) writeFileSync(`${root}/${FILE}`, await wantedClientTypes());
