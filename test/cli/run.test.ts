import { createHash } from 'node:crypto';
import { readdir, readFile, rm } from 'node:fs/promises';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { storesOfFile, withPorts } from '../../jobs/cli/environment.ts';
import { listJobs } from '../../jobs/store/index.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { runCli, runHere, TINY_TRUTH, temporaryFolder, tinyCampaign, writeTree } from './helpers.ts';

const TABLES = Object.keys(RESULT_TABLES).map((table) => `${table}.csv`);

async function readTables(folder: string): Promise<Record<string, string>> {
  return Object.fromEntries(
    await Promise.all(TABLES.map(async (name) => [name, await readFile(join(folder, name), 'utf8')])),
  );
}

/** Rows of a CSV file without quoted cells, keyed by its header. */
function parseRows(text: string): Record<string, string>[] {
  const [head, ...lines] = text
    .trimEnd()
    .split('\n')
    .map((line) => line.split(','));
  return lines.map((cells) => Object.fromEntries(head.map((name, i) => [name, cells[i]])));
}

describe('run', () => {
  test('a folder becomes result files; again it computes nothing and writes the same bytes; then it follows the folder', async () => {
    const folder = await temporaryFolder();
    const [input, out] = [join(folder, 'tiny'), join(folder, 'results')];
    await writeTree(input, tinyCampaign());

    const first = await runCli(['run', input, '--out', out, '--workers', '0']);
    expect([first.code, first.err]).toEqual([0, '']);
    for (const line of first.out.split('\n').slice(0, -2)) expect(line.length, line).toBeLessThanOrEqual(100);
    expect((await readdir(out)).sort()).toEqual([...TABLES, 'blobs', 'ratespan.db', 'report.html', 'run.json'].sort());
    const tables = await readTables(out);
    for (const [name, text] of Object.entries(tables)) {
      expect(text.split('\n')[0]).toBe(RESULT_TABLES[name.replace('.csv', '') as keyof typeof RESULT_TABLES].join(','));
      expect(text).not.toMatch(/NaN|Infinity|undefined/);
    }
    const headline = (quantity: string, method: string): number =>
      Number(
        parseRows(tables['parameters.csv']).find(
          (r) =>
            r.quantity === quantity &&
            r.method === method &&
            r.conversion === '' &&
            r.interval === 'monte_carlo' &&
            r.variant === '',
        )?.value,
      );
    for (const method of ['kissinger', 'friedman', 'vyazovkin', 'jmak']) {
      expect(Math.abs(headline('activation_energy', method) / TINY_TRUTH.energyKJPerMol - 1), method).toBeLessThan(
        0.02,
      );
    }
    expect(Math.abs(headline('avrami_exponent', 'jmak') / TINY_TRUTH.avramiExponent - 1)).toBeLessThan(0.05);
    const record = JSON.parse(await readFile(join(out, 'run.json'), 'utf8'));
    expect(record).toMatchObject({
      program: 'ratespan',
      campaign: 'tiny',
      refused: [],
      counts: { scans: { reduced: 6 } },
    });
    expect(record.inputs).toHaveLength(8);
    for (const { file, sha256 } of record.inputs)
      expect(sha256, file).toBe(
        createHash('sha256')
          .update(await readFile(join(input, file)))
          .digest('hex'),
      );
    expect(record.settings.draws).toBe(400);
    expect(record.seed.glass).toMatch(/^[0-9a-f]{64}$/);

    const jobs = () => withPorts({ ...storesOfFile(join(out, 'ratespan.db')), workers: 0 }, (ports) => listJobs(ports));
    const jobsBefore = await jobs();
    const second = await runHere(['run', input, '--out', out, '--workers', '0']);
    expect([second.code, second.out]).toEqual([0, first.out]);
    expect(await readTables(out)).toEqual(tables);
    expect(await jobs()).toEqual(jobsBefore);

    // One file gone, one renamed together with its row, one replaced by other bytes.
    const changed = tinyCampaign();
    changed['glass/oven/renamed.txt'] = changed['glass/oven/4-a.txt'];
    changed['glass/oven/10-b.txt'] = changed['glass/oven/40-b.txt'];
    changed['scans.csv'] = String(changed['scans.csv']).replace('4-a.txt', 'renamed.txt');
    delete changed['glass/oven/4-a.txt'];
    delete changed['glass/oven/40-b.txt'];
    await rm(input, { recursive: true });
    await writeTree(input, changed);
    const third = await runHere(['run', input, '--out', out, '--workers', '0', '--quiet']);
    expect([third.code, third.out]).toEqual([0, '']);
    const now = await readTables(out);
    expect(now['scans.csv']).toContain('renamed.txt');
    expect(now['flags.csv']).toMatch(/file-missing.*40-b\.txt/);
    expect(parseRows(now['parameters.csv'])[0].scan_count).toBe('5');
    const fresh = await runHere(['run', input, '--out', join(folder, 'fresh'), '--workers', '0', '--quiet']);
    expect(fresh.code).toBe(0);
    expect(now).toEqual(await readTables(join(folder, 'fresh')));
  }, 60_000);

  test('results do not depend on where and when they were computed', async () => {
    const folder = await temporaryFolder();
    await writeTree(join(folder, 'one/tiny'), tinyCampaign());
    await writeTree(join(folder, 'two/tiny'), Object.fromEntries(Object.entries(tinyCampaign()).reverse()));
    const [one, two] = await Promise.all([
      runHere(['run', join(folder, 'one/tiny'), '--out', join(folder, 'one/out'), '--workers', '1']),
      // The database elsewhere, the results inside the campaign folder, where they are not read back.
      runHere([
        'run',
        join(folder, 'two/tiny'),
        '--out',
        join(folder, 'two/tiny/out'),
        '--db',
        join(folder, 'two/x.db'),
        '--json',
      ]),
    ]);
    expect([one.code, two.code]).toEqual([0, 0]);
    expect(await readTables(join(folder, 'two/tiny/out'))).toEqual(await readTables(join(folder, 'one/out')));
    expect(JSON.parse(two.out).samples).toMatchObject([{ sample: 'glass', state: 'fitted' }]);
    expect(await readdir(join(folder, 'two'))).toEqual(expect.arrayContaining(['blobs', 'x.db']));
  }, 60_000);

  test('bad files do not stop the rest, and a campaign that cannot be fitted ends with 3', async () => {
    const folder = await temporaryFolder();
    const files = tinyCampaign();
    const few = Object.fromEntries(Object.entries(files).filter(([path]) => !/\/(10|40)-/.test(path)));
    await writeTree(join(folder, 'in'), { ...few, 'glass/oven/notes.txt': 'no table here\n' });
    const { code, out } = await runHere(['run', join(folder, 'in'), '--out', join(folder, 'out'), '--workers', '0']);
    expect(code).toBe(3);
    expect(out).toContain('few-rates');
    const { 'scans.csv': scans, 'flags.csv': flags } = await readTables(join(folder, 'out'));
    expect(scans).toMatch(/notes\.txt,.*set_aside/);
    expect(flags).toMatch(/file-missing.*10-a\.txt/);
  }, 60_000);

  test('refuses results over a campaign folder, and an empty one', async () => {
    const folder = await temporaryFolder();
    await writeTree(join(folder, 'a'), tinyCampaign());
    await writeTree(join(folder, 'b'), { 'scans.csv': 'file,sample,instrument\n' });
    await writeTree(join(folder, 'c'), { 'scans.csv': '', 'run.json': '{"program":"another"}' });
    await writeTree(join(folder, 'd'), { '.hidden': '' });
    const outcomes = await Promise.all([
      runHere(['run', join(folder, 'a'), '--out', join(folder, 'a')]),
      runHere(['run', join(folder, 'a'), '--out', join(folder, 'b')]),
      runHere(['run', join(folder, 'a'), '--out', join(folder, 'c')]),
      runHere(['run', join(folder, 'd'), '--out', join(folder, 'e')]),
    ]);
    expect(outcomes.map((o) => o.code)).toEqual([2, 2, 2, 2]);
    expect(outcomes[0].err).toContain('is the campaign folder itself');
    expect(outcomes[1].err).toContain('without a run.json of ratespan');
    expect(await readdir(join(folder, 'b'))).toEqual(['scans.csv']);
    expect(outcomes[3].err).toContain('holds no file to read');
  }, 60_000);

  test('--dry says how everything would be understood and writes nothing', async () => {
    const folder = await temporaryFolder();
    await writeTree(folder, { ...tinyCampaign(), 'glass/oven/notes.txt': 'no table here\n', 'loose.txt': 'x\n' });
    const { code, out } = await runHere(['run', folder, '--dry']);
    expect(code).toBe(0);
    expect(out).toContain(
      [
        'glass/oven/10-a.txt',
        '  sample glass, instrument oven (by sheet)',
        '  UTF-8, tab, decimal point, header line 2; 1201 rows',
        '  time [s] from «Time [s]», temperature [°C] from «Temperature [°C]», heat flow [mW] from «Heat flow [mW]»',
        '  exotherm up; nominal rate 0.1667 K/s',
      ].join('\n'),
    );
    expect(out).toMatch(/notes\.txt\n {2}sample glass, instrument oven \(by folder\)\n {2}set aside: /);
    expect(out).toMatch(/loose\.txt\n {2}no sheet row and no SAMPLE\/INSTRUMENT folders name it/);
    expect(out).toContain('6 scans, 2 sheets, 2 files set aside; nothing was computed or written');
    expect(await readdir(folder)).not.toContain('ratespan.db');
  }, 60_000);
});
