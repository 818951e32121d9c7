import { and, eq, inArray, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, instruments, parameters, samples, scans } from '../../schema/tables/index.ts';
import type { FitResult, ParameterRow } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration, SampleSheetRow, ScanSheetRow } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { replaceFlags } from './assignment-rows.ts';
import type { Statement } from './fence.ts';
import { loadSampleRow } from './scan-rows.ts';

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

/** Rows of one statement: a row takes 17 values, a statement at most 32 766. */
const ROWS_A_STATEMENT = 1_000;

/** Replaces the fit of a sample. Where inputs have changed since they were loaded the newer fit is waited for. */
export function saveFit(db: LibSQLDatabase, sample: SampleRow, fitKey: string, fit: FitResult): Statement[] {
  const { campaignId, sample: name } = sample;
  const statements: Statement[] = [
    db.delete(parameters).where(and(eq(parameters.campaignId, campaignId), eq(parameters.sample, name))),
  ];
  for (let at = 0; at < fit.parameters.length; at += ROWS_A_STATEMENT) {
    const part = fit.parameters.slice(at, at + ROWS_A_STATEMENT);
    statements.push(db.insert(parameters).values(part.map((row, i) => parameterValues(campaignId, at + i, row))));
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

const parameterValues = (campaignId: string, position: number, row: ParameterRow) => ({
  campaignId,
  sample: row.sample,
  position,
  event: row.event,
  quantity: row.quantity,
  method: row.method,
  conversion: row.conversion,
  temperatureK: row.temperature_K,
  value: row.value,
  unit: row.unit,
  lower95: row.lower95,
  upper95: row.upper95,
  scanCount: row.scan_count,
  rateMinKPerS: row.rate_min_K_per_s,
  rateMaxKPerS: row.rate_max_K_per_s,
  flags: row.flags,
  interval: row.interval,
  variant: row.variant,
});
