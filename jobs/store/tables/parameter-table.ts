import { and, asc, eq } from 'drizzle-orm';
import { instruments, parameters, plans } from '../../../schema/tables/index.ts';
import type { Ports } from '../../ports/index.ts';
import type { ResultRow, TableFilter } from './result-row.ts';
import { sampleChunks } from './sample-chunks.ts';
import { compareCells } from './scan-table.ts';

/** By sample and event, then as the steps ordered them: fit, verdict, forecast. From position `offset` on. */
export async function* readParameterTable(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  { sample, quantity, method, event, offset }: TableFilter,
): AsyncGenerator<ResultRow> {
  const where = and(
    eq(parameters.campaignId, campaignId),
    sample === undefined ? undefined : eq(parameters.sample, sample),
    quantity === undefined ? undefined : eq(parameters.quantity, quantity),
    method === undefined ? undefined : eq(parameters.method, method),
    event === undefined ? undefined : eq(parameters.event, event),
  );
  for await (const { of, skip } of sampleChunks(ports, parameters, where, offset)) {
    const rows = await ports.database.read
      .select()
      .from(parameters)
      .where(of)
      .orderBy(asc(parameters.sample), asc(parameters.event), asc(parameters.position));
    for (let i = skip; i < rows.length; i++) yield resultRowOf(rows[i]);
  }
}

const resultRowOf = (row: typeof parameters.$inferSelect): ResultRow => ({
  sample: row.sample,
  event: row.event,
  quantity: row.quantity,
  method: row.method,
  conversion: row.conversion,
  temperature_K: row.temperatureK,
  value: row.value,
  unit: row.unit,
  lower95: row.lower95,
  upper95: row.upper95,
  scan_count: row.scanCount,
  rate_min_K_per_s: row.rateMinKPerS,
  rate_max_K_per_s: row.rateMaxKPerS,
  flags: row.flags,
  interval: row.interval,
  variant: row.variant,
});

/** Calibrated instruments by name. */
export async function readInstrumentTable(ports: Pick<Ports, 'database'>, campaignId: string): Promise<ResultRow[]> {
  const rows = await ports.database.read
    .select({ calibration: instruments.calibration })
    .from(instruments)
    .where(eq(instruments.campaignId, campaignId));
  const calibrations = rows.flatMap((row) => row.calibration ?? []);
  calibrations.sort((a, b) => compareCells(a.instrument, b.instrument));
  return calibrations.map((row) => ({
    instrument: row.instrument,
    kind: row.kind,
    offset_K: row.offsetK,
    offset_se_K: row.offsetSeK,
    lag_s: row.lagS,
    lag_se_s: row.lagSeS,
    heat_factor: row.heatFactor ?? null,
    heat_factor_se: row.heatFactorSe ?? null,
    standards: row.standards,
    source: row.source,
    offset_slope: row.offsetSlope ?? null,
    response_time_s: row.responseS ?? null,
  }));
}

/** Coverage or gaps of the last plan, in the plan's order. */
export async function readPlanTable(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  part: 'coverage' | 'gaps',
  sample?: string,
): Promise<ResultRow[]> {
  const [plan] = await ports.database.read.select().from(plans).where(eq(plans.campaignId, campaignId));
  const rows: readonly { sample: string }[] = plan?.[part] ?? [];
  return rows.filter((row) => sample === undefined || row.sample === sample) as unknown as ResultRow[];
}
