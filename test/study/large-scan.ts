import { createScanReader } from '../../jobs/instrument/index.ts';
import { reduceScan } from '../../jobs/reduction/index.ts';
import { seededRandom } from './generator/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable } from './table.ts';

/** Heating rate K/s, range K and event of the synthetic scan; the exotherm is a bell of 10 K full width at half maximum at `peakK`. */
const SCAN = { rateKPerS: 10 / 60, startK: 400, endK: 700, peakK: 560, widthK: 10, height: 2e-3, noise: 2e-5 };
/** Bytes pushed at once, about what a network hands over. */
const CHUNK_BYTES = 65_536;

/** Text of so many rows in chunks; never the whole of it at once. */
function* chunksOf(rows: number, seed: string): Generator<Uint8Array> {
  const random = seededRandom(`large/${seed}`);
  const { rateKPerS, startK, endK, peakK, widthK, height, noise } = SCAN;
  let text = 'synthetic\nexo up\ntime [s],temperature [K],heat flow [mW]\n';
  const encoder = new TextEncoder();
  for (let i = 0; i < rows; i++) {
    const temperatureK = startK + ((endK - startK) * i) / (rows - 1);
    const bell = height * Math.exp(-4 * Math.LN2 * ((temperatureK - peakK) / widthK) ** 2);
    const heatFlow = bell - 1e-3 - 2e-6 * (temperatureK - startK) + noise * random.normal();
    const timeS = (temperatureK - startK) / rateKPerS;
    text += `${timeS.toFixed(5)},${temperatureK.toFixed(4)},${(1e3 * heatFlow).toFixed(6)}\n`;
    if (text.length < CHUNK_BYTES) continue;
    yield encoder.encode(text);
    text = '';
  }
  yield encoder.encode(text);
}

export interface LargeScanResult {
  rows: number;
  bytes: number;
  readS: number;
  reduceS: number;
  /** MB above what the process held before the first chunk: peak of the resident memory after reading and after reducing */
  readMB: number;
  reduceMB: number;
  /** K */
  peakErrorK: number;
}

/** Pushes a scan of so many rows through the reader and reduces it; the time the text takes to make is not counted. */
export function readLargeScan(rows: number, seed: string): LargeScanResult {
  const peakMB = () => process.resourceUsage().maxRSS / 1000;
  const before = process.memoryUsage().rss / 1e6;
  const reader = createScanReader('large.csv');
  let bytes = 0;
  let readS = 0;
  const timed = <T>(run: () => T): [T, number] => {
    const started = performance.now();
    const result = run();
    return [result, (performance.now() - started) / 1000];
  };
  for (const chunk of chunksOf(rows, seed)) {
    bytes += chunk.length;
    readS += timed(() => reader.push(chunk))[1];
  }
  const [read, endS] = timed(() => reader.end());
  if (!read.ok) throw new Error(read.refusal.reason);
  if (read.scan.timeS.length !== rows) throw new Error(`${read.scan.timeS.length} rows of ${rows} were read`);
  const readMB = peakMB() - before;
  const [reduced, reduceS] = timed(() =>
    reduceScan(read.scan, {
      file: 'large.csv',
      sample: 'synthetic',
      role: 'sample',
      calibration: {
        instrument: 'furnace',
        kind: 'furnace',
        source: 'sheet',
        offsetK: 0,
        offsetSeK: 0.1,
        lagS: 0,
        lagSeS: 0.1,
        standards: 0,
      },
    }),
  );
  if (!reduced.ok) throw new Error(reduced.reason);
  const [event] = reduced.reduced.events;
  return {
    rows,
    bytes,
    readS: readS + endS,
    reduceS,
    readMB,
    reduceMB: peakMB() - before,
    peakErrorK: (event?.peakK ?? Number.NaN) - SCAN.peakK,
  };
}

export function largeScanStudy({ count = 1_000_000, seed }: StudyOptions): string {
  const r = readLargeScan(count, seed);
  const cells = (step: string, seconds: number, megabytes: number) => [
    step,
    seconds.toFixed(2),
    (r.rows / seconds / 1e6).toFixed(2),
    megabytes.toFixed(0),
  ];
  return [
    `One scan of ${r.rows} rows and three columns, ${(r.bytes / 1e6).toFixed(1)} MB of text (${((24 * r.rows) / 1e6).toFixed(0)} MB of numbers), pushed in chunks of ${CHUNK_BYTES / 1024} kB; peak found ${r.peakErrorK.toFixed(3)} K from the truth.`,
    markdownTable(
      ['step', 's', 'million rows/s', 'peak memory above the start, MB'],
      [cells('read', r.readS, r.readMB), cells('reduce', r.reduceS, r.reduceMB)],
    ),
    `Peak memory of the whole process: ${(process.resourceUsage().maxRSS / 1000).toFixed(0)} MB.`,
  ].join('\n\n');
}
