import type { Ports } from '../jobs/ports/index.ts';
import { readDiagrams } from '../jobs/steps/answer-forecast.ts';
import {
  listSampleScans,
  type ResultRow,
  readReducedScan,
  readSamplePlots,
  readTable,
  type SampleView,
  type TableFilter,
} from '../jobs/store/index.ts';
import { CURVE_KINDS, type CurveKind } from '../schema/wire/curve-kinds.ts';
import { FORECAST_CAUTION } from '../schema/wire/forecasts.ts';
import type { ResultTable } from '../schema/wire/result-tables.ts';
import {
  CURVE_AXES,
  conversionSeries,
  energySeries,
  glassCurves,
  kissingerLawSeries,
  kissingerSeries,
  localEnergySeries,
  outlineOf,
  type ReducedSampleScan,
  traceSeries,
} from './curves.ts';
import { criticalRateSeries, diagramSeries } from './diagram-series.ts';
import type { CurveSeries, Curves } from './shapes/curves.ts';

async function reducedScans(ports: Ports, { campaignId, sample }: SampleView): Promise<ReducedSampleScan[]> {
  const found: ReducedSampleScan[] = [];
  for (const { id, file, instrument, status } of await listSampleScans(ports, campaignId, sample)) {
    const reduced = status === 'reduced' ? await readReducedScan(ports, id) : undefined;
    if (reduced) found.push({ id, file, instrument, reduced });
  }
  return found;
}

/** What the curves of one sample are made of, each read when it is first asked for and only once. */
interface CurveSources {
  reduced(): Promise<ReducedSampleScan[]>;
  plots(): ReturnType<typeof readSamplePlots>;
  diagrams(): ReturnType<typeof readDiagrams>;
  scans(): Promise<ResultRow[]>;
  /** Rows of one quantity or method at least */
  parameters(filter: TableFilter): Promise<ResultRow[]>;
}

function once<Value>(read: () => Promise<Value>): () => Promise<Value> {
  let value: Promise<Value> | undefined;
  return () => (value ??= read());
}

async function makeCurves(kind: CurveKind, sources: CurveSources): Promise<Curves> {
  if (kind === 'growth' || kind === 'viscosity') return { kind, ...glassCurves(await sources.plots(), kind) };
  const series: Record<Exclude<CurveKind, 'growth' | 'viscosity'>, () => Promise<CurveSeries[]>> = {
    thermogram: async () => traceSeries(await sources.reduced(), 'heatFlow'),
    baseline: async () => traceSeries(await sources.reduced(), 'baseline'),
    conversion: async () => conversionSeries(await sources.reduced()),
    kissinger: async () => [
      ...kissingerSeries(await sources.scans(), await sources.parameters({ method: 'kissinger' })),
      ...kissingerLawSeries(await sources.plots()),
    ],
    energy: async () => energySeries(await sources.parameters({ quantity: 'activation_energy' })),
    local_energy: async () => localEnergySeries(await sources.plots()),
    ttt: async () => diagramSeries((await sources.diagrams())('ttt')),
    constant_heating: async () => {
      const drawn = (await sources.diagrams())('constant_heating');
      const critical = await sources.parameters({ quantity: 'critical_heating_rate' });
      return [...diagramSeries(drawn), ...criticalRateSeries(drawn, critical)];
    },
  };
  return onAxes(kind, await series[kind]());
}

function onAxes(kind: CurveKind, series: CurveSeries[]): Curves {
  const { x, y } = CURVE_AXES[kind];
  const units = new Set(series.flatMap(({ unit }) => unit ?? []));
  const [unit] = units;
  return {
    kind,
    x,
    y: units.size === 1 ? { ...y, unit } : y,
    series,
    ...((kind === 'ttt' || kind === 'constant_heating') && { caution: FORECAST_CAUTION }),
  };
}

/** The curves of one kind of a sample. */
export function readCurves(ports: Ports, sample: SampleView, kind: CurveKind): Promise<Curves> {
  const rowsOf = async (table: ResultTable, filter: TableFilter): Promise<ResultRow[]> => {
    const rows: ResultRow[] = [];
    for await (const row of readTable(ports, sample.campaignId, table, { sample: sample.sample, ...filter }))
      rows.push(row);
    return rows;
  };
  return makeCurves(kind, {
    reduced: () => reducedScans(ports, sample),
    plots: () => readSamplePlots(ports, sample.id),
    diagrams: () => readDiagrams(ports, sample.id),
    scans: () => rowsOf('scans', {}),
    parameters: (filter) => rowsOf('parameters', filter),
  });
}

/** The curves of every kind that a sample has, from rows of its tables that were read already. */
export async function readEveryCurve(
  ports: Ports,
  sample: SampleView,
  rows: { scans: ResultRow[]; parameters: ResultRow[] },
): Promise<Partial<Record<CurveKind, Curves>>> {
  const sources: CurveSources = {
    reduced: once(() => reducedScans(ports, sample)),
    plots: once(() => readSamplePlots(ports, sample.id)),
    diagrams: once(() => readDiagrams(ports, sample.id)),
    scans: async () => rows.scans,
    parameters: async () => rows.parameters,
  };
  const curves: Partial<Record<CurveKind, Curves>> = {};
  for (const kind of CURVE_KINDS) {
    const found = await makeCurves(kind, sources);
    if (found.series.length > 0) curves[kind] = found;
  }
  return curves;
}

/** Thermograms and baselines as outlines, from one look at the reduced scans. */
export async function readOutlines(ports: Ports, sample: SampleView): Promise<Curves[]> {
  const scans = await reducedScans(ports, sample);
  return [
    onAxes('thermogram', traceSeries(scans, 'heatFlow').map(outlineOf)),
    onAxes('baseline', traceSeries(scans, 'baseline').map(outlineOf)),
  ];
}
