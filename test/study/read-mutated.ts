import { gzipSync } from 'node:zlib';
import {
  ArchiveRefused,
  readInstrumentsSheet,
  readSamplesSheet,
  readScan,
  readScansSheet,
  unpackArchive,
} from '../../jobs/instrument/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import { makeZip } from '../instrument/zip-file.ts';
import { type Random, seededRandom } from './generator/index.ts';
import { drawScan, drawSheet, MUTATIONS, type SoundFile } from './mutations.ts';
import { markdownTable, quantile } from './table.ts';

const READERS = {
  'scans.csv': readScansSheet,
  'instruments.csv': readInstrumentsSheet,
  'samples.csv': readSamplesSheet,
} as const;

const isReasoned = (...parts: (string | undefined)[]): boolean => parts.every((part) => (part ?? '').length > 10);
const areReasoned = (flags: readonly Flag[]): boolean => flags.every((f) => isReasoned(f.detail, f.action));

/** What became of a file: `read` and `refused` are sound, `wrong` says what is not (an exception, a bad row, a missing reason). */
export interface MutatedOutcome {
  mutation: string;
  packing: 'plain' | 'sheet' | 'zip' | 'gzip';
  read: boolean;
  wrong?: string;
  bytes: number;
  seconds: number;
}

/** Number `index` of the files that `seed` draws: made, changed, read. */
export function readMutated(seed: string, index: number): MutatedOutcome {
  const random = seededRandom(`mutated/${seed}/${index}`);
  const mutation = random.pick(Object.keys(MUTATIONS));
  const packing = random.pick(['plain', 'plain', 'sheet', 'zip', 'gzip'] as const);
  const file = packing === 'sheet' ? drawSheet(random) : drawScan(random);
  const { path, bytes } = changed(file, packing, MUTATIONS[mutation], random);
  const started = performance.now();
  let outcome: { read: boolean; wrong?: string };
  try {
    outcome = packing === 'zip' || packing === 'gzip' ? readArchive(bytes, path) : readOne(bytes, path);
  } catch (error) {
    outcome = { read: false, wrong: `exception: ${(error as Error).message}` };
  }
  return { mutation, packing, ...outcome, bytes: bytes.length, seconds: (performance.now() - started) / 1000 };
}

/** The file with one or two changes; of an archive half the time inside, half the time in its packed bytes. */
function changed(
  file: SoundFile,
  packing: MutatedOutcome['packing'],
  mutate: (bytes: Uint8Array, random: Random) => Uint8Array,
  random: Random,
): SoundFile {
  const packs = packing === 'zip' || packing === 'gzip';
  const inside = !packs || random.uniform() < 0.5;
  const again = random.uniform() < 0.3 ? random.pick(Object.values(MUTATIONS)) : undefined;
  const change = (bytes: Uint8Array) => {
    const once = mutate(bytes, random);
    return again ? again(once, random) : once;
  };
  const content = inside ? change(file.bytes) : file.bytes;
  if (!packs) return { path: file.path, bytes: content };
  const packed =
    packing === 'gzip'
      ? new Uint8Array(gzipSync(content))
      : makeZip([
          { name: file.path, data: content },
          { name: 'sample/furnace/second.txt', data: file.bytes },
          { name: 'sample/furnace/third.txt.gz', data: new Uint8Array(gzipSync(content)), method: 0 },
        ]);
  const path = packing === 'gzip' ? `${file.path}.gz` : 'campaign.zip';
  return { path, bytes: inside ? packed : change(packed) };
}

function readArchive(bytes: Uint8Array, path: string): { read: boolean; wrong?: string } {
  let read = false;
  const flags: Flag[] = [];
  try {
    for (const member of unpackArchive(bytes, path, undefined, (f) => flags.push(f))) {
      const one = readOne(member.bytes, member.path);
      if (one.wrong) return one;
      read ||= one.read;
    }
  } catch (error) {
    if (!(error instanceof ArchiveRefused)) throw error;
    if (!isReasoned(error.message, error.action)) return { read: false, wrong: 'archive refused without a reason' };
  }
  return areReasoned(flags) ? { read } : { read, wrong: 'a flag without a reason' };
}

function readOne(bytes: Uint8Array, path: string): { read: boolean; wrong?: string } {
  if (path in READERS) {
    const { rows, flags } = READERS[path as keyof typeof READERS](bytes, path);
    if (!areReasoned(flags)) return { read: false, wrong: 'a flag without a reason' };
    return rows.length > 0 || flags.length > 0
      ? { read: rows.length > 0 }
      : { read: false, wrong: 'a sheet without a row and without a word' };
  }
  const outcome = readScan(bytes, path);
  if (!outcome.ok) {
    const { reason, action } = outcome.refusal;
    return isReasoned(reason, action) ? { read: false } : { read: false, wrong: 'refused without a reason' };
  }
  const { timeS, temperatureK, heatFlow, flags } = outcome.scan;
  if (timeS.length < 20 || temperatureK.length !== timeS.length || heatFlow.length !== timeS.length)
    return { read: true, wrong: 'columns of different or too small length' };
  for (let i = 0; i < timeS.length; i++) {
    const sound = Number.isFinite(timeS[i]) && temperatureK[i] > 0 && Number.isFinite(temperatureK[i] + heatFlow[i]);
    if (!sound || (i > 0 && !(timeS[i] > timeS[i - 1]))) return { read: true, wrong: `row ${i} is not sound` };
  }
  return areReasoned(flags) ? { read: true } : { read: true, wrong: 'a flag without a reason' };
}

/** Reads so many files in this process. */
export function readMutatedFiles(count: number, seed: string): string {
  const startMB = process.resourceUsage().maxRSS / 1000;
  const outcomes: MutatedOutcome[] = [];
  const troubles: string[] = [];
  for (let index = 0; index < count; index++) {
    const outcome = readMutated(seed, index);
    outcomes.push(outcome);
    if (outcome.wrong || outcome.seconds > 2)
      troubles.push(`- file ${index}, ${outcome.mutation}: ${outcome.wrong ?? `${outcome.seconds.toFixed(1)} s`}`);
  }
  const line = (name: string, of: MutatedOutcome[]) => [
    name,
    of.length,
    of.filter((o) => o.read && !o.wrong).length,
    of.filter((o) => !o.read && !o.wrong).length,
    of.filter((o) => o.wrong).length,
    (Math.max(0, ...of.map((o) => o.bytes)) / 1e6).toFixed(2),
    (
      1e3 *
      quantile(
        of.map((o) => o.seconds),
        0.5,
      )
    ).toFixed(2),
    (1e3 * Math.max(0, ...of.map((o) => o.seconds))).toFixed(0),
  ];
  const kinds = (['plain', 'sheet', 'zip', 'gzip'] as const).map((p) =>
    line(
      `packing: ${p}`,
      outcomes.filter((o) => o.packing === p),
    ),
  );
  const mutations = Object.keys(MUTATIONS).map((m) =>
    line(
      m,
      outcomes.filter((o) => o.mutation === m),
    ),
  );
  // maxRSS is in kB; it holds the runtime, the maker of the files and every outcome too.
  const peak = process.resourceUsage().maxRSS / 1000;
  return [
    `${count} mutated files, seed ${seed}; peak memory of the whole process ${peak.toFixed(0)} MB, ${startMB.toFixed(0)} MB of it before the first file.`,
    markdownTable(
      ['changed by', 'files', 'read', 'refused with a reason', 'wrong', 'largest, MB', 'median, ms', 'slowest, ms'],
      [...mutations, ...kinds, line('all', outcomes)],
    ),
    troubles.length === 0 ? 'Nothing crashed, hung over 2 s, or came out unsound.' : troubles.slice(0, 20).join('\n'),
  ].join('\n\n');
}
