import { gzipSync } from 'node:zlib';
import { expect, it } from 'vitest';
import { receiveFile } from '../../jobs/store/index.ts';
import { makeZip } from '../instrument/zip-file.ts';
import { forEachTest } from './each-test.ts';
import { drain, rowsOf, send, type TestPorts } from './test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

const bytesOf = (text: string) => new TextEncoder().encode(text);
const zipOf = (members: Record<string, string>) =>
  makeZip(Object.entries(members).map(([name, text]) => ({ name, data: bytesOf(text) })));
const sendZip = (members: Record<string, string>) => receiveFile(ports, campaign, 'all.zip', zipOf(members));
const statuses = async () => (await rowsOf(ports, campaign, 'scans')).map((row) => [row.file, row.status]);

it('members become files of the campaign and are fitted with the others', async () => {
  expect((await sendZip({ 'A/oven/1.txt': 'rate 1', 'A/oven/2.txt': 'rate 2' })).outcome).toBe('archive');
  await receiveFile(ports, campaign, 'A/oven/3.txt.gz', gzipSync('rate 3'));
  await drain(ports, campaign);
  expect(await statuses()).toEqual([
    ['A/oven/3.txt', 'reduced'],
    ['all.zip/A/oven/1.txt', 'reduced'],
    ['all.zip/A/oven/2.txt', 'reduced'],
  ]);
  expect(await rowsOf(ports, campaign, 'parameters')).toMatchObject([{ scan_count: 3 }]);
});

it('a sheet in gzip is a sheet', async () => {
  await send(ports, campaign, '1.txt', 'rate 1');
  await receiveFile(ports, campaign, 'scans.csv.gz', gzipSync('file,sample,instrument\n1.txt,A,oven\n'));
  await drain(ports, campaign);
  expect(await rowsOf(ports, campaign, 'scans')).toMatchObject([{ file: '1.txt', sample: 'A', status: 'reduced' }]);
});

it('an archive sent again with other members keeps the same, replaces the changed and drops the missing', async () => {
  await sendZip({ 'A/oven/1.txt': 'rate 1', 'A/oven/2.txt': 'rate 2', 'A/oven/3.txt': 'rate 3' });
  await drain(ports, campaign);
  expect(
    (await sendZip({ 'A/oven/1.txt': 'rate 1', 'A/oven/2.txt': 'rate 5', 'A/oven/4.txt': 'rate 4' })).outcome,
  ).toBe('replaced');
  await drain(ports, campaign);
  expect((await statuses()).map(String).sort()).toEqual([
    'all.zip/A/oven/1.txt,reduced',
    'all.zip/A/oven/2.txt,reduced',
    'all.zip/A/oven/2.txt,superseded',
    'all.zip/A/oven/3.txt,superseded',
    'all.zip/A/oven/4.txt,reduced',
  ]);
  expect(ports.compute.counts.readScan).toBe(5);
  expect(await rowsOf(ports, campaign, 'parameters')).toMatchObject([{ scan_count: 3, rate_max_K_per_s: 5 }]);
});

it('a damaged archive takes nothing with it', async () => {
  await receiveFile(ports, campaign, 'all.zip', bytesOf('no zip at all'));
  for (const n of [1, 2]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
  await drain(ports, campaign);
  expect(await statuses()).toEqual([
    ['A/oven/1.txt', 'reduced'],
    ['A/oven/2.txt', 'reduced'],
    ['all.zip', 'set_aside'],
  ]);
});
