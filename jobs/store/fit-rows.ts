import { and, eq, inArray, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, instruments, parameters, samples, scans } from '../../schema/tables/index.ts';
import type { FitResult, ParameterRow } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration, SampleSheetRow, ScanSheetRow } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { replaceFlags } from './assignment-rows.ts';
import type { Statement } from './fence.ts';
import { loadSampleRow } from './scan-rows.ts';
import { insertRows, json } from './statement.ts';

export type SampleRow = typeof samples.$inferSelect;

export interface FitScanRow {
  path: string;
  sha256: string;
  instrument: string;
  sheetRow: ScanSheetRow | null;
  reducedKey: string;
}

export interface FitRows {
  sample: SampleRow;
  scans: FitScanRow[];
  calibrations: InstrumentCalibration[];
  sampleRow: SampleSheetRow | undefined;
}

export async function loadFit(ports: Ports, sampleId: string): Promise<FitRows | undefined> {
  const { read } = ports.database;
  const [sample] = await read.select().from(samples).where(eq(samples.id, sampleId));
  if (!sample) return undefined;
  const rows = await read
    .select({
      path: files.path,
      sha256: files.sha256,
      instrument: scans.instrument,
      sheetRow: scans.sheetRow,
      reducedKey: scans.reducedKey,
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
  const names = [...new Set(rows.map((row) => row.instrument as string))];
  const calibrated = names.length
    ? await read
        .select({ calibration: instruments.calibration })
        .from(instruments)
        .where(and(eq(instruments.campaignId, sample.campaignId), inArray(instruments.instrument, names)))
    : [];
  return {
    sample,
    scans: rows as FitScanRow[],
    calibrations: calibrated.flatMap((row) => row.calibration ?? []),
    sampleRow: await loadSampleRow(ports, sample.campaignId, sample.sample),
  };
}

/** Rows of one statement: full ones have one text, which stays prepared. */
const ROWS_A_STATEMENT = 50;

/** Replaces the fit of a sample. Where inputs have changed since they were loaded the newer fit is waited for. */
export function saveFit(db: LibSQLDatabase, sample: SampleRow, fitKey: string, fit: FitResult): Statement[] {
  const { campaignId, sample: name } = sample;
  const statements: Statement[] = [
    db.delete(parameters).where(and(eq(parameters.campaignId, campaignId), eq(parameters.sample, name))),
  ];
  for (let at = 0; at < fit.parameters.length; at += ROWS_A_STATEMENT) {
    const part = fit.parameters.slice(at, at + ROWS_A_STATEMENT);
    statements.push(
      insertRows(
        'parameters',
        PARAMETER_COLUMNS,
        part.map((row, i) => parameterValues(campaignId, at + i, row)),
      ),
    );
  }
  return [
    ...statements,
    ...replaceFlags(db, campaignId, `fit:${name}`, fit.flags),
    ...markFitted(db, sample, fit.state, fit.reason),
    db.update(samples).set({ fitKey, reports: fit.reports }).where(eq(samples.id, sample.id)),
  ];
}

/** The inputs are those of the stored fit: only the state moves. */
export function markFitted(
  db: LibSQLDatabase,
  { id, inputsRevision }: SampleRow,
  state: FitResult['state'] | 'failed',
  reason: string | undefined,
): Statement[] {
  return [
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

const PARAMETER_COLUMNS =
  'campaign_id, sample, position, event, quantity, method, conversion, temperature_k, value, unit, lower95, upper95, scan_count, rate_min_k_per_s, rate_max_k_per_s, flags, interval, variant';

const parameterValues = (campaignId: string, position: number, row: ParameterRow) => [
  campaignId,
  row.sample,
  position,
  row.event,
  row.quantity,
  row.method,
  row.conversion,
  row.temperature_K,
  row.value,
  row.unit,
  row.lower95,
  row.upper95,
  row.scan_count,
  row.rate_min_K_per_s,
  row.rate_max_K_per_s,
  json(row.flags),
  row.interval,
  row.variant,
];
