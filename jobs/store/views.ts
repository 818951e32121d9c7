import { and, asc, eq, sql } from 'drizzle-orm';
import { campaigns, files, instruments, samples, scans } from '../../schema/tables/index.ts';
import type { ReducedScan } from '../../schema/wire/reduced.ts';
import type { SampleState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import { LOCAL_LAB } from './campaigns.ts';
import { type Corrections, standingCorrections } from './correction-rows.ts';
import { readReducedOrRevive } from './lost-blobs.ts';
import { allRows, text } from './statement.ts';
import type { ResultRow } from './tables/index.ts';
import { loadScanRecord, scanRowsOf } from './tables/scan-table.ts';

export interface ScanView {
  id: string;
  campaignId: string;
  /** Rows of scans.csv of this scan, one an event. */
  rows: ResultRow[];
  /** Blob of the original file and its size, bytes. */
  originalKey: string;
  bytes: number;
  reducedKey: string | null;
  /** Fields corrected by hand, with the value that counts. */
  corrections: Corrections;
}

/** One scan within a lab, or undefined. */
export async function findScan(ports: Ports, scanId: string, lab = LOCAL_LAB): Promise<ScanView | undefined> {
  const [owner] = await ports.database.read
    .select({ campaignId: scans.campaignId })
    .from(scans)
    .innerJoin(campaigns, eq(campaigns.id, scans.campaignId))
    .where(and(eq(scans.id, scanId), eq(campaigns.lab, lab)));
  const scan = owner ? await loadScanRecord(ports, scanId) : undefined;
  if (!owner || !scan) return undefined;
  return {
    id: scanId,
    campaignId: owner.campaignId,
    rows: scanRowsOf(scan),
    originalKey: scan.blobKey,
    bytes: scan.bytes,
    reducedKey: scan.reducedKey,
    corrections: await standingCorrections(ports, scanId),
  };
}

/** The reduced curves of a scan, its events numbered over all scans of the sample, or undefined when it has none. */
export async function readReducedScan(ports: Ports, scanId: string): Promise<ReducedScan | undefined> {
  const [scan] = await allRows<{ campaignId: string; key: string | null; numbers: string | null }>(
    ports.database.read,
    text`
      select campaign_id as campaignId, reduced_key as key, event_numbers as numbers from scans
      where id = ${scanId} and status = 'reduced'`,
  );
  if (!scan?.key) return undefined;
  const outcome = await readReducedOrRevive(ports, scan.campaignId, scan.key);
  if (!outcome?.ok) return undefined;
  const { events, ...others } = outcome.reduced;
  const numbers: (number | undefined)[] = JSON.parse(scan.numbers ?? '[]');
  return { ...others, events: events.map((event, i) => ({ ...event, event: numbers[i] ?? event.event })) };
}

export interface SampleView {
  id: string;
  campaignId: string;
  sample: string;
  state: SampleState;
  reason: string | null;
}

const SAMPLE_VIEW = {
  id: samples.id,
  campaignId: samples.campaignId,
  sample: samples.sample,
  state: samples.state,
  reason: samples.reason,
};

/** One sample within a lab, or undefined. */
export async function findSample(ports: Ports, sampleId: string, lab = LOCAL_LAB): Promise<SampleView | undefined> {
  const [row] = await ports.database.read
    .select(SAMPLE_VIEW)
    .from(samples)
    .innerJoin(campaigns, eq(campaigns.id, samples.campaignId))
    .where(and(eq(samples.id, sampleId), eq(campaigns.lab, lab)));
  return row;
}

/** Samples of a campaign by name. */
export function listSamples(ports: Ports, campaignId: string): Promise<SampleView[]> {
  return ports.database.read
    .select(SAMPLE_VIEW)
    .from(samples)
    .where(eq(samples.campaignId, campaignId))
    .orderBy(asc(samples.sample));
}

/** Answers when database and blob store can be reached, else throws what stopped them. */
export async function checkStores(ports: Ports): Promise<void> {
  await ports.database.read.run(sql`select 1 from campaigns limit 1`);
  await ports.blobs.has('derived/reachable');
}

/** Files of a campaign as they came, archives before their members, with the hash of their bytes, by path. */
export function listInputs(ports: Ports, campaignId: string): Promise<{ file: string; sha256: string }[]> {
  return ports.database.read
    .select({ file: files.path, sha256: files.sha256 })
    .from(files)
    .where(and(eq(files.campaignId, campaignId), eq(files.superseded, false)))
    .orderBy(asc(files.path));
}

export interface InstrumentView {
  id: string;
  campaignId: string;
  instrument: string;
}

const INSTRUMENT_VIEW = { id: instruments.id, campaignId: instruments.campaignId, instrument: instruments.instrument };

/** One instrument within a lab, or undefined. */
export async function findInstrument(
  ports: Ports,
  instrumentId: string,
  lab = LOCAL_LAB,
): Promise<InstrumentView | undefined> {
  const [row] = await ports.database.read
    .select(INSTRUMENT_VIEW)
    .from(instruments)
    .innerJoin(campaigns, eq(campaigns.id, instruments.campaignId))
    .where(and(eq(instruments.id, instrumentId), eq(campaigns.lab, lab)));
  return row;
}

/** Instruments of a campaign by name. */
export const listInstruments = (ports: Ports, campaignId: string): Promise<InstrumentView[]> =>
  ports.database.read
    .select(INSTRUMENT_VIEW)
    .from(instruments)
    .where(eq(instruments.campaignId, campaignId))
    .orderBy(asc(instruments.instrument));
