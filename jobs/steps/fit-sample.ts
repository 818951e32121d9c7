import { decodePacked, encodePacked } from '../../schema/wire/packed-blob.ts';
import type { FitResult } from '../../schema/wire/parameters.ts';
import type { Ports } from '../ports/index.ts';
import { type FitRows, markFitted, type ScanEventNumbers, saveFit } from '../store/fit-rows.ts';
import { queueNext } from '../store/judge-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { listSamples } from '../store/views.ts';
import { compareText } from './assign-scans.ts';
import { readDerived } from './read-derived.ts';
import { inputsKeyOf, loadFitScans, loadOrderedFit, seedOf } from './sample-inputs.ts';
import { FIT_DRAWS } from './settings.ts';

/** A fit as it is kept, with the numbers that its matching gave the events of each scan. */
export interface StoredFit {
  fit: FitResult;
  eventNumbers: ScanEventNumbers[];
}

/** Step `fit-sample`: every law on the reduced scans of one sample. The same inputs as the stored fit: only looked up. */
export async function fitStoredSample(ports: Ports, job: ClaimedJob): Promise<void> {
  const rows = await loadOrderedFit(ports, job.subject);
  if (!rows) return completeJob(ports, job);
  const { sample } = rows;
  const fitKey = inputsKeyOf(rows);
  if (sample.fitKey === fitKey) {
    const stored = await readStoredFit(ports, rows, fitKey);
    if (stored) {
      return completeJob(ports, job, (db, now) => [
        ...markFitted(db, sample, stored.fit, stored.eventNumbers),
        queueNext(sample, 'judge-curvature', now),
      ]);
    }
  }
  const { fit, eventNumbers } = (await readStoredFit(ports, rows, fitKey)) ?? (await fitRows(ports, rows, fitKey));
  await completeJob(ports, job, (db, now) => [
    ...saveFit(db, sample, fitKey, fit, eventNumbers),
    queueNext(sample, 'judge-curvature', now),
  ]);
}

/** Seeds of the draws by sample, as the stored fits had them: for the record of a run. A sample without a reduced scan has none. */
export async function readSampleSeeds(ports: Ports, campaignId: string): Promise<Record<string, string>> {
  const seeds: [string, string][] = [];
  for (const { id, sample } of await listSamples(ports, campaignId)) {
    const rows = await loadOrderedFit(ports, id);
    if (rows && rows.scans.length + rows.peaks.length > 0) seeds.push([sample, seedOf(rows)]);
  }
  return Object.fromEntries(seeds.sort((a, b) => compareText(a[0], b[0])));
}

const blobKeyOf = ({ sample }: FitRows, fitKey: string) => `derived/${sample.campaignId}/fit-${fitKey}`;

/** The stored fit of these inputs, or undefined where it has to be made (again). */
export async function readStoredFit(ports: Ports, rows: FitRows, fitKey: string): Promise<StoredFit | undefined> {
  const stored = await readDerived(
    ports,
    blobKeyOf(rows, fitKey),
    decodePacked<{ fit: FitResult; numbers: number[][] }>,
  );
  return stored && { fit: stored.fit, eventNumbers: numbersOf(rows, stored.numbers) };
}

/** Scans are kept by their place in the inputs' order: their ids are no part of a result. */
const numbersOf = ({ scans }: FitRows, numbers: readonly number[][]): ScanEventNumbers[] =>
  scans.map(({ scanId }, i) => ({ scanId, numbers: numbers[i] }));

async function fitRows(ports: Ports, rows: FitRows, fitKey: string): Promise<StoredFit> {
  const { scans, eventNumbers } = await loadFitScans(ports, rows);
  const fit = await ports.compute.fitSample({
    sample: rows.sample.sample,
    scans,
    instruments: rows.calibrations,
    seed: seedOf(rows),
    draws: FIT_DRAWS,
  });
  const numbers = eventNumbers.map((one) => one.numbers);
  await ports.blobs.put(blobKeyOf(rows, fitKey), encodePacked({ fit, numbers }));
  return { fit, eventNumbers };
}
