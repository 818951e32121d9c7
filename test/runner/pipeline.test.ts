import { describe, expect, it } from 'vitest';
import { campaignStatus, listJobs, withdrawMissingFiles } from '../../jobs/store/index.ts';
import { forEachTest } from './each-test.ts';
import { allTables, drain, rowsOf, send, type TestPorts } from './test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

const SHEET_HEAD = 'file,sample,instrument,mass [mg]\n';
const statusOf = async (file: string) =>
  (await rowsOf(ports, campaign, 'scans')).filter((row) => row.file === file).map((row) => row.status);

describe('the way of a scan', () => {
  it('leads from files in the folder layout to parameters, coverage and gaps', async () => {
    for (const rate of [1, 2, 4]) await send(ports, campaign, `A/oven/${rate}.txt`, `rate ${rate}`);
    expect((await campaignStatus(ports, campaign)).settled).toBe(false);
    await drain(ports, campaign);

    const status = await campaignStatus(ports, campaign);
    expect(status).toMatchObject({ settled: true, scans: { reduced: 3, received: 0 }, jobs: { failed: 0 }, eta_s: 0 });
    expect(status.samples).toEqual([{ sample: 'A', state: 'fitted', verdict: 'undecided' }]);
    const [parameter] = await rowsOf(ports, campaign, 'parameters');
    expect(parameter).toMatchObject({ sample: 'A', scan_count: 3, rate_min_K_per_s: 1, rate_max_K_per_s: 4 });
    expect(await rowsOf(ports, campaign, 'conversion')).toHaveLength(3 * 99);
    expect(await rowsOf(ports, campaign, 'coverage')).toMatchObject([
      { sample: 'A', instrument: 'oven', scan_count: 3 },
    ]);
    expect((await rowsOf(ports, campaign, 'gaps')).map((row) => row.code)).toContain('no-standard');
    expect(await rowsOf(ports, campaign, 'instruments')).toMatchObject([{ instrument: 'oven', source: 'prior' }]);
  });

  it('fits a sample once for a burst, however many scans it has', async () => {
    for (let i = 0; i < 12; i++) await send(ports, campaign, `A/oven/${i}.txt`, `rate ${i + 1}`);
    await drain(ports, campaign);
    expect(ports.compute.counts).toEqual({ readScan: 12, reduceScan: 12, fitSample: 1 });
  });

  it('refits a sample when another scan comes, and only that sample', async () => {
    for (const sample of ['A', 'B']) {
      for (const rate of [1, 2]) await send(ports, campaign, `${sample}/oven/${rate}.txt`, `${sample} rate ${rate}`);
    }
    await drain(ports, campaign);
    await send(ports, campaign, 'A/oven/3.txt', 'rate 3');
    await drain(ports, campaign);
    expect(ports.compute.counts).toEqual({ readScan: 5, reduceScan: 5, fitSample: 3 });
    expect((await rowsOf(ports, campaign, 'parameters')).map((row) => [row.sample, row.scan_count])).toEqual([
      ['A', 3],
      ['B', 2],
    ]);
  });

  it('sets a refused file and a scan without direction aside with their reasons, and fits the rest', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    await send(ports, campaign, 'A/oven/2.txt', 'rate 2');
    await send(ports, campaign, 'A/oven/bad.txt', 'bad bytes');
    await send(ports, campaign, 'A/oven/dull.txt', 'dull');
    await drain(ports, campaign);
    const rows = await rowsOf(ports, campaign, 'scans');
    expect(rows.map((row) => [row.file, row.status, row.reason, row.flags])).toEqual([
      ['A/oven/1.txt', 'reduced', null, []],
      ['A/oven/2.txt', 'reduced', null, []],
      ['A/oven/bad.txt', 'set_aside', '«bad bytes» is no scan', ['file-damaged']],
      ['A/oven/dull.txt', 'set_aside', 'no direction', ['sign-unknown']],
    ]);
    expect((await campaignStatus(ports, campaign)).samples).toMatchObject([{ sample: 'A', state: 'fitted' }]);
  });

  it('gives up on a file that makes the reader throw after five attempts, and fits the rest', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    await send(ports, campaign, 'A/oven/2.txt', 'rate 2');
    await send(ports, campaign, 'A/oven/x.txt', 'poison');
    await drain(ports, campaign);
    expect(ports.compute.counts.readScan).toBe(2 + 5);
    const failed = (await rowsOf(ports, campaign, 'scans'))[2];
    expect(failed).toMatchObject({ file: 'A/oven/x.txt', status: 'failed' });
    expect(failed.reason).toContain('5 attempts: the reader stumbled over A/oven/x.txt');
    expect(await campaignStatus(ports, campaign)).toMatchObject({ settled: true, jobs: { failed: 1 } });
    expect(await rowsOf(ports, campaign, 'parameters')).toHaveLength(1);
  });

  it('calls an instrument a chip when its fastest scan says so, for all of its scans', async () => {
    await send(ports, campaign, 'A/sensor/1.txt', 'rate 1');
    await drain(ports, campaign);
    expect(await rowsOf(ports, campaign, 'instruments')).toMatchObject([{ kind: 'furnace' }]);
    await send(ports, campaign, 'A/sensor/2.txt', 'rate 50');
    await drain(ports, campaign);
    expect(await rowsOf(ports, campaign, 'instruments')).toMatchObject([{ kind: 'chip' }]);
    expect(ports.compute.counts.reduceScan).toBe(3);
  });
});

describe('sheets', () => {
  it('let files wait for rows and rows wait for files', async () => {
    await send(ports, campaign, 'scans.csv', `${SHEET_HEAD}1.txt,A,oven,1\nlate.txt,A,oven,1\n`);
    await send(ports, campaign, '1.txt', 'rate 1');
    await send(ports, campaign, 'unnamed.txt', 'rate 9');
    await drain(ports, campaign);
    expect(await statusOf('unnamed.txt')).toEqual(['unassigned']);
    expect((await rowsOf(ports, campaign, 'flags')).map((row) => [row.code, row.file])).toEqual([
      ['file-missing', 'late.txt'],
      ['file-unassigned', 'unnamed.txt'],
    ]);
    await send(ports, campaign, 'late.txt', 'rate 2');
    await send(ports, campaign, 'scans.csv', `${SHEET_HEAD}1.txt,A,oven,1\nlate.txt,A,oven,1\nunnamed.txt,A,oven,1\n`);
    await drain(ports, campaign);
    expect((await rowsOf(ports, campaign, 'scans')).map((row) => row.status)).toEqual([
      'reduced',
      'reduced',
      'reduced',
    ]);
    expect(await rowsOf(ports, campaign, 'flags')).toEqual([]);
  });

  it('are waited for: files that came with their sheets are assigned once', async () => {
    for (const n of [1, 2, 4]) await send(ports, campaign, `${n}.txt`, `rate ${n}`);
    await send(ports, campaign, 'instruments.csv', 'instrument,kind\noven,furnace\n');
    await send(ports, campaign, 'scans.csv', `${SHEET_HEAD}${[1, 2, 4].map((n) => `${n}.txt,A,oven,5\n`).join('')}`);
    await drain(ports, campaign);
    const jobs = await listJobs(ports, { campaignId: campaign });
    expect(jobs.filter(({ step }) => step === 'assign-scans')).toHaveLength(1);
    expect((await campaignStatus(ports, campaign)).samples).toMatchObject([{ sample: 'A', state: 'fitted' }]);
  });

  it('re-queue only the scan whose row changed, not those whose line moved', async () => {
    for (const n of [1, 2, 3]) await send(ports, campaign, `${n}.txt`, `rate ${n}`);
    await send(ports, campaign, 'scans.csv', `${SHEET_HEAD}1.txt,A,oven,1\n2.txt,A,oven,1\n3.txt,B,oven,1\n`);
    await drain(ports, campaign);
    const before = { ...ports.compute.counts };
    const answer = await send(
      ports,
      campaign,
      'scans.csv',
      `${SHEET_HEAD}3.txt,B,oven,1\n1.txt,A,oven,1\n2.txt,A,oven,7\n`,
    );
    expect(answer.outcome).toBe('replaced');
    await drain(ports, campaign);
    expect(ports.compute.counts).toEqual({
      // The columns of a scan that is reduced anew are read from its original once more.
      readScan: before.readScan + 1,
      reduceScan: before.reduceScan + 1,
      fitSample: before.fitSample + 1,
    });
    expect((await rowsOf(ports, campaign, 'scans')).map((row) => [row.file, row.mass_mg])).toEqual([
      ['1.txt', 1],
      ['2.txt', 7],
      ['3.txt', 1],
    ]);
  });

  it('make a scan unassigned again when its row is removed, and forget a sample that nobody names', async () => {
    for (const n of [1, 2, 3]) await send(ports, campaign, `${n}.txt`, `rate ${n}`);
    await send(ports, campaign, 'scans.csv', `${SHEET_HEAD}1.txt,A,oven,1\n2.txt,A,oven,1\n3.txt,B,oven,1\n`);
    await drain(ports, campaign);
    await send(ports, campaign, 'scans.csv', `${SHEET_HEAD}1.txt,A,oven,1\n2.txt,A,oven,1\n`);
    await drain(ports, campaign);
    expect(await statusOf('3.txt')).toEqual(['unassigned']);
    expect((await campaignStatus(ports, campaign)).samples).toMatchObject([{ sample: 'A', state: 'fitted' }]);
    expect((await rowsOf(ports, campaign, 'coverage')).map((row) => row.sample)).toEqual(['A']);
  });

  it('make two scans of one file with two segments', async () => {
    await send(ports, campaign, '1.txt', 'rate 1');
    await send(ports, campaign, 'scans.csv', 'file,sample,instrument,segment\n1.txt,A,oven,1\n1.txt,A,oven,3\n');
    await drain(ports, campaign);
    expect((await rowsOf(ports, campaign, 'scans')).map((row) => [row.segment, row.status])).toEqual([
      [1, 'reduced'],
      [3, 'reduced'],
    ]);
  });

  it('send only the scans of a corrected instrument or sample back to reduction', async () => {
    for (const n of [1, 2]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    for (const n of [3, 4]) await send(ports, campaign, `B/stove/${n}.txt`, `rate ${n}`);
    await send(ports, campaign, 'instruments.csv', 'instrument,kind,lag [s]\noven,furnace,2\nstove,furnace,2\n');
    await drain(ports, campaign);
    expect(ports.compute.counts).toEqual({ readScan: 4, reduceScan: 4, fitSample: 2 });
    await send(ports, campaign, 'instruments.csv', 'instrument,kind,lag [s]\nstove,furnace,3\noven,furnace,2\n');
    await drain(ports, campaign);
    expect(ports.compute.counts).toEqual({ readScan: 6, reduceScan: 6, fitSample: 3 });
    await send(ports, campaign, 'samples.csv', 'sample,melting temperature [K]\nA,900\n');
    await drain(ports, campaign);
    expect(ports.compute.counts).toEqual({ readScan: 8, reduceScan: 8, fitSample: 4 });
  });
});

describe('files sent again', () => {
  it('are known by path and bytes, and nothing runs', async () => {
    for (const n of [1, 2]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    await drain(ports, campaign);
    const before = await allTables(ports, campaign);
    const counts = { ...ports.compute.counts };
    const answer = await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    expect(answer).toMatchObject({ outcome: 'known', scan_ids: [expect.any(String)] });
    await drain(ports, campaign);
    expect(await allTables(ports, campaign)).toBe(before);
    expect(ports.compute.counts).toEqual(counts);
  });

  it('are the same scan under another name, which is set aside', async () => {
    for (const n of [1, 2]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    expect((await send(ports, campaign, 'A/oven/copy.txt', 'rate 1')).outcome).toBe('known');
    await drain(ports, campaign);
    expect(
      (await rowsOf(ports, campaign, 'scans')).map((row) => [row.file, row.status, row.reason, row.flags]),
    ).toEqual([
      ['A/oven/1.txt', 'reduced', null, []],
      ['A/oven/2.txt', 'reduced', null, []],
      ['A/oven/copy.txt', 'set_aside', 'same bytes as «A/oven/1.txt»', ['same-bytes']],
    ]);
    expect(await rowsOf(ports, campaign, 'parameters')).toMatchObject([{ scan_count: 2 }]);
  });

  it('replace the scan of their path when the bytes differ, and bring it back with its old bytes', async () => {
    for (const n of [1, 2]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    await drain(ports, campaign);
    const [first] = await rowsOf(ports, campaign, 'parameters');
    expect((await send(ports, campaign, 'A/oven/1.txt', 'rate 5')).outcome).toBe('replaced');
    await drain(ports, campaign);
    expect((await statusOf('A/oven/1.txt')).sort()).toEqual(['reduced', 'superseded']);
    expect(await rowsOf(ports, campaign, 'parameters')).toMatchObject([{ scan_count: 2, rate_max_K_per_s: 5 }]);
    const counts = { ...ports.compute.counts };
    expect((await send(ports, campaign, 'A/oven/1.txt', 'rate 1')).outcome).toBe('replaced');
    await drain(ports, campaign);
    expect(await rowsOf(ports, campaign, 'parameters')).toEqual([first]);
    expect(ports.compute.counts).toEqual(counts);
  });

  it('that the folder no longer holds are withdrawn', async () => {
    for (const n of [1, 2, 3]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    await drain(ports, campaign);
    expect(await withdrawMissingFiles(ports, campaign, new Set(['A/oven/1.txt', 'A/oven/2.txt']))).toEqual([
      'A/oven/3.txt',
    ]);
    await drain(ports, campaign);
    expect(await statusOf('A/oven/3.txt')).toEqual(['superseded']);
    // Read and reduced before, but its row would not say so had it gone a moment sooner.
    const gone = (await rowsOf(ports, campaign, 'scans')).find((row) => row.file === 'A/oven/3.txt')!;
    const told = Object.entries(gone).filter(
      ([, cell]) => cell !== null && !(Array.isArray(cell) && cell.length === 0),
    );
    expect(told.map(([column]) => column)).toEqual(['file', 'sha256', 'status']);
    expect(await rowsOf(ports, campaign, 'parameters')).toMatchObject([{ scan_count: 2 }]);
  });
});
