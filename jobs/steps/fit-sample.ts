import type { FitInput, FitResult, FitScan } from '../../schema/wire/parameters.ts';
import { decodeReduceOutcome } from '../../schema/wire/reduced-blob.ts';
import type { Ports } from '../ports/index.ts';
import { type FitRows, type FitScanRow, loadFit, markFitted, saveFit } from '../store/fit-rows.ts';
import { hashOf } from '../store/ids.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { listSamples } from '../store/views.ts';
import { compareText } from './assign-scans.ts';
import { DerivedLost, readDerived } from './columns-store.ts';
import { FIT_DRAWS, STEP_VERSIONS } from './settings.ts';

/** Step `fit-sample`: every law on the reduced scans of one sample. The same inputs as the stored fit: only looked up. */
export async function fitStoredSample(ports: Ports, job: ClaimedJob): Promise<void> {
  const rows = await loadOrderedFit(ports, job.subject);
  if (!rows) return completeJob(ports, job);
  const { sample } = rows;
  const fitKey = fitKeyOf(rows);
  if (sample.fitKey === fitKey) {
    const fit = await readDerived(ports, blobKeyOf(rows, fitKey), decodeFit);
    if (fit) return completeJob(ports, job, (db) => markFitted(db, sample, fit.state, fit.reason));
  }
  const fit = await fitOrLookUp(ports, rows, fitKey);
  await completeJob(ports, job, (db) => saveFit(db, sample, fitKey, fit));
}

/** Seeds of the draws by sample, as the stored fits had them: for the record of a run. A sample without a reduced scan has none. */
export async function readSampleSeeds(ports: Ports, campaignId: string): Promise<Record<string, string>> {
  const seeds: [string, string][] = [];
  for (const { id, sample } of await listSamples(ports, campaignId)) {
    const rows = await loadOrderedFit(ports, id);
    if (rows && rows.scans.length > 0) seeds.push([sample, seedOf(rows)]);
  }
  return Object.fromEntries(seeds.sort((a, b) => compareText(a[0], b[0])));
}

/** Order by content, not by arrival. */
async function loadOrderedFit(ports: Ports, sampleId: string): Promise<FitRows | undefined> {
  const rows = await loadFit(ports, sampleId);
  rows?.scans.sort((a, b) => compareText(orderOf(a), orderOf(b)));
  rows?.calibrations.sort((a, b) => compareText(a.instrument, b.instrument));
  return rows;
}

const decodeFit = (bytes: Uint8Array) => JSON.parse(new TextDecoder().decode(bytes)) as FitResult;
const blobKeyOf = ({ sample }: FitRows, fitKey: string) => `derived/${sample.campaignId}/fit-${fitKey}`;

async function fitOrLookUp(ports: Ports, rows: FitRows, fitKey: string): Promise<FitResult> {
  const key = blobKeyOf(rows, fitKey);
  const stored = await readDerived(ports, key, decodeFit);
  if (stored) return stored;
  const scans = (await Promise.all(rows.scans.map((scan) => fitScansOf(ports, scan)))).flat();
  const input: FitInput = {
    sample: rows.sample.sample,
    scans,
    instruments: rows.calibrations,
    seed: seedOf(rows),
    draws: FIT_DRAWS,
  };
  const fit = await ports.compute.fitSample(input);
  await ports.blobs.put(key, new TextEncoder().encode(JSON.stringify(fit)));
  return fit;
}

/** The events of one reduced scan. */
async function fitScansOf(
  ports: Ports,
  { path, sha256, instrument, sheetRow, reducedKey }: FitScanRow,
): Promise<FitScan[]> {
  const outcome = await readDerived(ports, reducedKey, decodeReduceOutcome);
  if (!outcome) throw new DerivedLost(reducedKey);
  if (!outcome.ok)
    throw new Error(`${path} counts as reduced, but blob ${reducedKey} holds a refusal: ${outcome.reason}`);
  const { events, segment } = outcome.reduced;
  return events.map((event) => ({
    file: path,
    sha256,
    segment,
    instrument,
    ...(sheetRow?.replicate !== undefined && { replicate: sheetRow.replicate }),
    event,
  }));
}

/** Order of scans by content, not by path: a renamed file changes no result. */
const orderOf = ({ sha256, instrument, sheetRow }: FitScanRow) => `${sha256} ${sheetRow?.segment ?? 0} ${instrument}`;

/** What the sheets say of a scan, without where they say it. */
const sheetValues = ({ sha256, instrument, sheetRow }: FitScanRow) => [
  sha256,
  instrument,
  sheetRow && { ...sheetRow, file: undefined, line: undefined, note: undefined },
];

/** Seed of the draws: sorted input hashes, sheet values, step version and settings; never ids, paths or order of arrival (METHODS 11). */
function seedOf({ scans, calibrations, sampleRow }: FitRows): string {
  const values = [scans.map(sheetValues), calibrations, sampleRow && { ...sampleRow, line: undefined }];
  return hashOf(['fit-sample', STEP_VERSIONS, FIT_DRAWS, values]);
}

/** Key of the result: as the seed, and the paths, which its flags quote. */
const fitKeyOf = (rows: FitRows) =>
  hashOf([seedOf(rows), rows.sample.sample, rows.scans.map(({ path, reducedKey }) => [path, reducedKey])]);
