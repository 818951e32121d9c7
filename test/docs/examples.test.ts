import { spawn, spawnSync } from 'node:child_process';
import { mkdir, mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { type RunningServer, startServer } from '../../api/node.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { type Harness, openHarness } from '../api/harness.ts';
import { smallCampaign, TRUE_ENERGY_KJ_PER_MOL } from '../api/small-campaign.ts';

// The examples of README, as they stand there, against a live server; in the order of the page: curl makes the campaign that the others read.
const root = fileURLToPath(new URL('../..', import.meta.url));
const WRITTEN_URL = 'http://127.0.0.1:8787';

const works = (command: string, args: string[]): boolean => spawnSync(command, args, { stdio: 'ignore' }).status === 0;
const python = ['python3', '/usr/bin/python3'].find((name) => works(name, ['-c', 'import requests, pandas']));
const hasR = works('Rscript', ['--version']);

let harness: Harness;
let server: RunningServer;
let runner: ReturnType<typeof createRunner>;
let folder: string;
let readme: string;
beforeAll(async () => {
  readme = await readFile(join(root, 'README.md'), 'utf8');
  folder = await mkdtemp(join(tmpdir(), 'ratespan-examples-'));
  for (const [path, bytes] of smallCampaign()) {
    await mkdir(dirname(join(folder, path)), { recursive: true });
    await writeFile(join(folder, path), bytes);
  }
  harness = await openHarness();
  server = await startServer({ ports: harness.ports, port: 0, host: '127.0.0.1' });
  runner = createRunner(harness.ports, { concurrency: 1, owner: 'examples' });
  runner.start();
});
afterAll(async () => {
  await runner.stop();
  await server.close();
  await harness.close();
  await rm(folder, { recursive: true, force: true });
});

/** The one block of a language about the campaign of the examples, with the address of the server that runs. */
function example(language: string): string {
  const blocks = [...readme.matchAll(/```(\w+)\n([\s\S]*?)```/g)].filter(
    ([, name, text]) => name === language && text.includes('films'),
  );
  expect(blocks).toHaveLength(1);
  return blocks[0][2].replaceAll(WRITTEN_URL, server.url);
}

/** Runs without blocking: the server lives in this process. */
function run(command: string, args: string[]): Promise<string> {
  const child = spawn(command, args, { cwd: folder, stdio: ['ignore', 'pipe', 'pipe'] });
  let [out, err] = ['', ''];
  child.stdout.on('data', (chunk) => (out += chunk));
  child.stderr.on('data', (chunk) => (err += chunk));
  return new Promise((resolve, reject) =>
    child.on('close', (code) => (code === 0 ? resolve(out) : reject(new Error(`${command}: ${code}\n${out}${err}`)))),
  );
}

/** E of Kissinger in a line of output: the truth to 2 %. */
function expectTruth(line: string | undefined): void {
  const value = Number(/kissinger +(\d+\.\d+)/.exec(line ?? '')?.[1]);
  expect(Math.abs(value / TRUE_ENERGY_KJ_PER_MOL - 1)).toBeLessThan(0.02);
}

test('curl: a campaign made, filled, waited for and read', { timeout: 90_000 }, async () => {
  await run('bash', ['-euc', example('sh')]);
  const csv = await readFile(join(folder, 'parameters.csv'), 'utf8');
  expectTruth(
    csv
      .split('\n')
      .find((line) => line.includes('activation_energy,kissinger'))
      ?.replaceAll(/,+/g, ' '),
  );
});

test.skipIf(!python)('Python (skipped without requests and pandas)', { timeout: 60_000 }, async () => {
  const out = await run(python as string, ['-c', example('python')]);
  expectTruth(out.split('\n').find((line) => line.includes('kissinger ')));
  expect(out).toMatch(/most likely/);
});

test.skipIf(!hasR)('R (skipped where it is missing)', { timeout: 60_000 }, async () => {
  await writeFile(join(folder, 'example.R'), example('r'));
  const out = await run('Rscript', ['example.R']);
  expectTruth(out.split('\n').find((line) => line.includes('kissinger ')));
});

test('TypeScript with the typed client', { timeout: 60_000 }, async () => {
  const client = pathToFileURL(join(root, 'api/client.ts')).href;
  await writeFile(join(folder, 'example.mts'), example('ts').replace('ratespan/client', client));
  const loader = pathToFileURL(join(root, 'node_modules/tsx/dist/loader.mjs')).href;
  const out = await run(process.execPath, ['--import', loader, 'example.mts']);
  expect(out).toContain('glass fitted');
  const [, value] = /activation_energy (\d+\.\d+) kJ\/mol/.exec(out) ?? [];
  expect(Math.abs(Number(value) / TRUE_ENERGY_KJ_PER_MOL - 1)).toBeLessThan(0.02);
});
