import { and, eq, inArray, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, instruments, samples, scans } from '../../schema/tables/index.ts';
import type { PeakSheetRow } from '../../schema/wire/forecasts.ts';
import type { FitResult } from '../../schema/wire/parameters.ts';
import type { ReducedSummary } from '../../schema/wire/reduced-blob.ts';
import type { InstrumentCalibration, SampleSheetRow, ScanSheetRow } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { loadPlacedRows, replaceFlags } from './assignment-rows.ts';
import type { Statement } from './fence.ts';
import { replaceParameters } from './parameter-rows.ts';
import { loadSampleRow } from './scan-rows.ts';
import { json, text } from './statement.ts';

export type SampleRow = typeof samples.$inferSelect;

/** Numbers of a scan's events over all scans of its sample, in the order of its own events. */
export interface ScanEventNumbers {
  scanId: string;
  numbers: number[];
}

export interface FitScanRow {
  scanId: string;
  path: string;
  sha256: string;
  instrument: string;
  sheetRow: ScanSheetRow | null;
  reducedKey: string;
  result: ReducedSummary | null;
}

/** A row of peaks.csv with the sheet it stands in. */
export interface PeakRow {
  path: string;
  row: PeakSheetRow;
}

export interface FitRows {
  sample: SampleRow;
  scans: FitScanRow[];
  peaks: PeakRow[];
  calibrations: InstrumentCalibration[];
  sampleRow: SampleSheetRow | undefined;
}

export async function loadFit(ports: Ports, sampleId: string): Promise<FitRows | undefined> {
  const { read } = ports.database;
  const [sample] = await read.select().from(samples).where(eq(samples.id, sampleId));
  if (!sample) return undefined;
  const rows = await read
    .select({
      scanId: scans.id,
      path: files.path,
      sha256: files.sha256,
      instrument: scans.instrument,
      sheetRow: scans.sheetRow,
      reducedKey: scans.reducedKey,
      result: scans.result,
    })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(
      and(
        eq(scans.campaignId, sample.campaignId),
        eq(scans.sample, sample.sample),
        eq(scans.role, 'sample'),
        eq(scans.status, 'reduced'),
      ),
    );
  const peaks = await loadPeakRows(ports, sample.campaignId, sample.sample);
  const names = [
    ...new Set([...rows.map((row) => row.instrument as string), ...peaks.map(({ row }) => row.instrument)]),
  ];
  const calibrated = names.length
    ? await read
        .select({ calibration: instruments.calibration })
        .from(instruments)
        .where(and(eq(instruments.campaignId, sample.campaignId), inArray(instruments.instrument, names)))
    : [];
  return {
    sample,
    scans: rows as FitScanRow[],
    peaks,
    calibrations: calibrated.flatMap((row) => row.calibration ?? []),
    sampleRow: await loadSampleRow(ports, sample.campaignId, sample.sample),
  };
}

/** Rows of peaks.csv, of one sample or of all. */
export const loadPeakRows = (ports: Pick<Ports, 'database'>, campaignId: string, sample?: string) =>
  loadPlacedRows<PeakSheetRow>(ports, campaignId, 'peaks', sample);

/**
 * Replaces the fit of a sample and numbers the events of its scans. Where inputs have changed since they were loaded the newer fit
 * is waited for.
 */
export function saveFit(
  db: LibSQLDatabase,
  sample: SampleRow,
  fitKey: string,
  fit: FitResult,
  eventNumbers: readonly ScanEventNumbers[],
): Statement[] {
  const { campaignId, sample: name } = sample;
  return [
    ...replaceParameters(db, campaignId, name, 'fit', fit.parameters),
    ...replaceFlags(db, campaignId, `fit:${name}`, fit.flags),
    ...markFitted(db, sample, fit, eventNumbers),
    db.update(samples).set({ fitKey, reports: fit.reports }).where(eq(samples.id, sample.id)),
  ];
}

/** The inputs are those of the stored fit: only the state moves, and scans that were reduced again get their numbers back. */
export function markFitted(
  db: LibSQLDatabase,
  { id, inputsRevision }: SampleRow,
  { state, reason }: Pick<FitResult, 'state' | 'reason'>,
  eventNumbers: readonly ScanEventNumbers[],
): Statement[] {
  return [
    ...eventNumbers.map(
      ({ scanId, numbers }) =>
        text`update scans set event_numbers = ${json(numbers)} where id = ${scanId} and status = 'reduced'`,
    ),
    db.run(sql`
      update samples set reason = ${reason ?? null}, state = case
        when inputs_revision = ${inputsRevision} then ${state}
        when queued_revision = inputs_revision then 'queued' else 'stale' end
      where id = ${id}`),
  ];
}

export const saveFailedSample = (db: LibSQLDatabase, sampleId: string, reason: string): Statement[] => [
  db.update(samples).set({ state: 'failed', reason }).where(eq(samples.id, sampleId)),
];
