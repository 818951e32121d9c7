import type { Ports } from '../jobs/ports/index.ts';
import { answerTransformation } from '../jobs/steps/answer-forecast.ts';
import {
  listSampleScans,
  type ResultRow,
  readReducedScan,
  readSamplePlots,
  readTable,
  type SampleView,
  type TableFilter,
} from '../jobs/store/index.ts';
import type { ResultTable } from '../schema/wire/result-tables.ts';
import {
  CURVE_AXES,
  conversionSeries,
  energySeries,
  glassCurves,
  kissingerLawSeries,
  kissingerSeries,
  type ReducedSampleScan,
  traceSeries,
  transformationSeries,
} from './curves.ts';
import type { CurveKind, CurveSeries, Curves } from './shapes/curves.ts';

async function reducedScans(ports: Ports, { campaignId, sample }: SampleView): Promise<ReducedSampleScan[]> {
  const found: ReducedSampleScan[] = [];
  for (const { id, file, instrument, status } of await listSampleScans(ports, campaignId, sample)) {
    const reduced = status === 'reduced' ? await readReducedScan(ports, id) : undefined;
    if (reduced) found.push({ id, file, instrument, reduced });
  }
  return found;
}

/** The curves of one kind of a sample, for its route and for the report. */
export async function readCurves(ports: Ports, sample: SampleView, kind: CurveKind): Promise<Curves> {
  if (kind === 'growth' || kind === 'viscosity')
    return { kind, ...glassCurves(await readSamplePlots(ports, sample.id), kind) };
  const rowsOf = async (table: ResultTable, filter: TableFilter = {}): Promise<ResultRow[]> => {
    const rows: ResultRow[] = [];
    for await (const row of readTable(ports, sample.campaignId, table, { sample: sample.sample, ...filter }))
      rows.push(row);
    return rows;
  };
  const series: Record<Exclude<CurveKind, 'growth' | 'viscosity'>, () => Promise<CurveSeries[]>> = {
    thermogram: async () => traceSeries(await reducedScans(ports, sample), 'heatFlow'),
    baseline: async () => traceSeries(await reducedScans(ports, sample), 'baseline'),
    conversion: async () => conversionSeries(await reducedScans(ports, sample)),
    kissinger: async () => [
      ...kissingerSeries(await rowsOf('scans'), await rowsOf('parameters', { method: 'kissinger' })),
      ...kissingerLawSeries(await readSamplePlots(ports, sample.id)),
    ],
    energy: async () => energySeries(await rowsOf('parameters', { quantity: 'activation_energy' })),
    ttt: async () => transformationSeries(await answerTransformation(ports, sample.id)),
  };
  return { kind, ...CURVE_AXES[kind], series: await series[kind]() };
}
