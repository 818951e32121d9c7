import { existsSync } from 'node:fs';
import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { afterEach, expect, test, vi } from 'vitest';
import { csvHeader } from '../../schema/wire/result-tables.ts';
import { runHere, startCli, temporaryFolder, tinyCampaign, writeTree } from './helpers.ts';

afterEach(() => {
  vi.unstubAllEnvs();
});

test('serve, send --wait and table: what a folder gives over HTTP is what run gives, byte for byte', async () => {
  const folder = await temporaryFolder();
  const input = join(folder, 'tiny');
  const data = join(folder, 'data');
  await writeTree(input, tinyCampaign());
  const server = startCli(['serve', '--port', '0', '--workers', '0'], { RATESPAN_DATA: data });
  const url = /ratespan on (\S+)/.exec(await server.until('\n'))![1];
  try {
    const sent = await runHere(['send', input, '--campaign', 'over HTTP', '--to', url, '--wait']);
    expect([sent.code, sent.out]).toEqual([0, '']);
    expect(sent.err).toMatch(
      /sent 8 files to campaign over HTTP: 2 sheet, 6 accepted\nsettled: 1 of 1 samples fitted, 0 jobs failed\n$/,
    );
    vi.stubEnv('RATESPAN_URL', url);
    const again = await runHere(['send', input, '--campaign', 'over HTTP', '--wait', '--json']);
    expect(again.err).toMatch(/: 8 known\n/);
    expect(JSON.parse(again.out)).toMatchObject({ outcomes: { known: 8 }, refused: [], status: { settled: true } });

    vi.stubEnv('RATESPAN_URL', '');
    vi.stubEnv('RATESPAN_DATA', data);
    const [remote, local, json, unknown] = await Promise.all([
      runHere(['table', 'over HTTP', '--to', url]),
      runHere(['table', 'over HTTP']),
      runHere(['table', 'over HTTP', '--db', join(data, 'ratespan.db'), '--format', 'json']),
      runHere(['table', 'none such', '--to', url]),
    ]);
    expect([remote.code, local.code, json.code]).toEqual([0, 0, 0]);
    expect(remote.out.startsWith(csvHeader('parameters'))).toBe(true);
    expect(local.out).toBe(remote.out);
    expect(JSON.parse(json.out)).toHaveLength(remote.out.trimEnd().split('\n').length - 1);
    expect([unknown.code, unknown.out]).toEqual([4, '']);
    expect(unknown.err).toContain('answers 404');

    const run = await runHere(['run', input, '--out', join(folder, 'out'), '--workers', '0', '--quiet']);
    expect(run.code).toBe(0);
    expect(await readFile(join(folder, 'out/parameters.csv'), 'utf8')).toBe(remote.out);
  } finally {
    server.stop();
  }
  expect((await server.finished).code).toBe(0);
}, 60_000);

test('an interrupted run ends with 130 and goes on where it was', async () => {
  const folder = await temporaryFolder();
  const input = join(folder, 'tiny');
  await writeTree(input, tinyCampaign());
  const args = ['run', input, '--out', join(folder, 'out'), '--workers', '1'];
  const run = startCli(args);
  // From the first stored file on, the process is past its start and has work before it.
  await vi.waitUntil(() => existsSync(join(folder, 'out/blobs')), { timeout: 20_000, interval: 20 });
  run.stop();
  const { code, err } = await run.finished;
  // On a quick machine the run may have ended before the signal.
  expect([0, 130]).toContain(code);
  if (code === 130) expect(err).toContain('the same command again goes on from here');
  expect((await runHere(args)).code).toBe(0);
}, 60_000);
