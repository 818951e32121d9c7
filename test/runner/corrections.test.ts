import { afterEach, beforeEach, expect, it } from 'vitest';
import { correctScan, findScan, listSampleScans, readScanHistory, StoreRefusal } from '../../jobs/store/index.ts';
import { allTables, drain, newCampaign, openTestPorts, rowsOf, send, type TestPorts } from './test-ports.ts';

const HEAD = 'file,sample,instrument,mass [mg],segment\n';
const SHEET = `${HEAD}1.txt,A,oven,1,\n2.txt,A,oven,1,\n3.txt,A,oven,1,\n4.txt,B,oven,1,\n5.txt,B,oven,1,\n`;

let ports: TestPorts;
let campaign: string;
beforeEach(async () => {
  ports = await openTestPorts();
  campaign = await newCampaign(ports);
  for (const n of [1, 2, 3, 4, 5]) await send(ports, campaign, `${n}.txt`, `rate ${n}`);
  await send(ports, campaign, 'scans.csv', SHEET);
  await drain(ports, campaign);
});
afterEach(() => ports.close());

const scanOf = async (file: string, sample = 'A') =>
  (await listSampleScans(ports, campaign, sample)).find((scan) => scan.file === file)?.id as string;
const rowOf = async (file: string) => (await rowsOf(ports, campaign, 'scans')).find((row) => row.file === file)!;
const flagsNow = async () => (await rowsOf(ports, campaign, 'flags')).map((row) => [row.code, row.file]);

it('re-queues the corrected scan and its sample, and nothing else', async () => {
  const counts = { ...ports.compute.counts };
  const before = await allTables(ports, campaign);
  await correctScan(ports, await scanOf('2.txt'), { massKg: 5e-6 });
  await drain(ports, campaign);
  expect(ports.compute.counts.reduceScan - counts.reduceScan).toBe(1);
  expect(ports.compute.counts.fitSample - counts.fitSample).toBe(1);
  expect(await rowOf('2.txt')).toMatchObject({ mass_mg: 5, status: 'reduced' });
  expect((await findScan(ports, await scanOf('2.txt')))?.corrections).toEqual({ massKg: 5e-6 });

  // Taken back, everything is as it was, and the reduction is a look-up.
  await correctScan(ports, await scanOf('2.txt'), { massKg: null });
  await drain(ports, campaign);
  expect(await allTables(ports, campaign)).toBe(before);
  expect(ports.compute.counts.reduceScan - counts.reduceScan).toBe(1);
  expect(await readScanHistory(ports, await scanOf('2.txt'))).toMatchObject([
    { field: 'massKg', before: 1e-6, after: 5e-6, cause: 'correction' },
    { field: 'massKg', before: 5e-6, after: 1e-6, cause: 'correction' },
  ]);
});

it('keeps a scan out with a reason, and lets it in again', async () => {
  const id = await scanOf('3.txt');
  await correctScan(ports, id, { excluded: 'pan was dirty' });
  await drain(ports, campaign);
  expect(await rowOf('3.txt')).toMatchObject({ status: 'excluded', reason: 'pan was dirty' });
  const energies = (await rowsOf(ports, campaign, 'parameters')).map((row) => [row.sample, row.scan_count]);
  expect(energies).toEqual([
    ['A', 2],
    ['B', 2],
  ]);
  await correctScan(ports, id, { excluded: null });
  await drain(ports, campaign);
  expect(await rowOf('3.txt')).toMatchObject({ status: 'reduced', reason: null });
});

it('stands over the sheet until that very cell changes', async () => {
  const id = await scanOf('1.txt');
  await correctScan(ports, id, { massKg: 7e-6, segment: 2 });
  await drain(ports, campaign);
  expect(await rowOf('1.txt')).toMatchObject({ mass_mg: 7, segment: 2 });
  expect(await scanOf('1.txt')).toBe(id);

  // Another row changes, lines move, the sample is renamed: the corrections stay.
  await send(ports, campaign, 'scans.csv', SHEET.replace('2.txt,A,oven,1,\n', '').replace('1.txt,A', '1.txt,C'));
  await drain(ports, campaign);
  expect(await rowOf('1.txt')).toMatchObject({ sample: 'C', mass_mg: 7, segment: 2 });
  expect((await findScan(ports, id))?.corrections).toEqual({ massKg: 7e-6, segment: 2 });
  expect((await flagsNow()).map(([code]) => code)).not.toContain('correction-replaced');

  await send(ports, campaign, 'scans.csv', SHEET.replace('1.txt,A,oven,1', '1.txt,A,oven,3'));
  await drain(ports, campaign);
  expect(await rowOf('1.txt')).toMatchObject({ sample: 'A', mass_mg: 3, segment: 2 });
  expect(await flagsNow()).toContainEqual(['correction-replaced', '1.txt']);
  expect((await readScanHistory(ports, id)).at(-1)).toMatchObject({
    field: 'massKg',
    before: 7e-6,
    after: 3e-6,
    cause: 'sheet',
  });
  // The flag stays through later assignments, until somebody corrects the cell again.
  await send(ports, campaign, 'samples.csv', 'sample\nA\n');
  await drain(ports, campaign);
  expect(await flagsNow()).toContainEqual(['correction-replaced', '1.txt']);
  await correctScan(ports, id, { massKg: 7e-6 });
  await drain(ports, campaign);
  expect(await flagsNow()).not.toContainEqual(['correction-replaced', '1.txt']);
});

it('follows a renamed file, and names a file that no row names', async () => {
  await correctScan(ports, await scanOf('1.txt'), { massKg: 7e-6 });
  await send(ports, campaign, 'lost.txt', 'rate 9');
  await drain(ports, campaign);
  await send(ports, campaign, 'moved/1.txt', 'rate 1');
  await send(ports, campaign, '1.txt', 'rate 30');
  await send(ports, campaign, 'scans.csv', SHEET.replace('1.txt', 'moved/1.txt'));
  await drain(ports, campaign);
  expect(await rowOf('moved/1.txt')).toMatchObject({ mass_mg: 7 });

  const [{ id }] = await ports.database.read.all<{ id: string }>(
    `select s.id from scans s join files f on f.id = s.file_id where f.path = 'lost.txt'`,
  );
  await correctScan(ports, id, { sample: 'B', instrument: 'oven' });
  await drain(ports, campaign);
  expect(await rowOf('lost.txt')).toMatchObject({ sample: 'B', instrument: 'oven', status: 'reduced' });
});

it('is refused for a scan that was replaced or is not there', async () => {
  const id = await scanOf('1.txt');
  await expect(correctScan(ports, 's_none', { massKg: 1 })).rejects.toThrow(StoreRefusal);
  await send(ports, campaign, '1.txt', 'rate 30');
  await expect(correctScan(ports, id, { massKg: 1 })).rejects.toMatchObject({ code: 'scan-superseded' });
});
