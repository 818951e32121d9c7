import type { CurveKind } from '../../schema/wire/curve-kinds.ts';
import type { ScanRow } from '../client/rows.ts';

/** One curve or set of points. */
export interface CurveSeries {
  name: string;
  instrument?: string;
  scan_id?: string;
  x: number[];
  y: number[];
  lower?: number[];
  upper?: number[];
  /** Of y, where it may differ between series */
  unit?: string;
  /** s from the start of a hold */
  time_s?: number[];
  /** K of each point's temperature outside the measured ones */
  beyond_measured_K?: number[];
}

/** Kinds that stand below the figures of the scans, each in figures of one make. */
export const OTHER_KINDS = [
  'local_energy',
  'growth',
  'viscosity',
  'ttt',
  'constant_heating',
] as const satisfies CurveKind[];

/** Body of GET /samples/:id/curves. */
export interface Curves {
  kind: CurveKind;
  x: { quantity: string; unit: string };
  y: { quantity: string; unit: string };
  series: CurveSeries[];
}

/** One scan of a sample with its curves and what was found on them. */
export interface ScanLane {
  key: string;
  scanId?: string;
  file: string;
  instrument: string;
  /** K/s, positive; null when not known */
  rateKPerS: number | null;
  isCooling: boolean;
  /** Mean temperature of a hold, K: its curves run over time, x is s from its start */
  holdK?: number;
  trace: CurveSeries;
  /** Missing where no event was found */
  baseline?: CurveSeries;
  rows: ScanRow[];
}

/**
 * Thermograms with their baselines and rows, slowest first. Two segments of one file are told apart by their order, which is
 * the order of time on both sides.
 */
export function buildLanes(thermogram: Curves, baseline: Curves, scans: readonly ScanRow[]): ScanLane[] {
  const seen = new Map<string, number>();
  return thermogram.series
    .map((trace): ScanLane => {
      const instrument = trace.instrument ?? '';
      const ofFile = scans.filter((row) => row.file === trace.name && row.instrument === instrument);
      const segments = [...new Set(ofFile.map((row) => row.segment))].sort((a, b) => (a ?? 0) - (b ?? 0));
      const place = seen.get(`${trace.name}\u0000${instrument}`) ?? 0;
      seen.set(`${trace.name}\u0000${instrument}`, place + 1);
      const rows = ofFile.filter((row) => row.segment === (segments[place] ?? segments[0]));
      const signed = rows[0]?.rate_K_per_s ?? rows[0]?.rate_nominal_K_per_s ?? null;
      const under = baseline.series.find((series) => series.scan_id === trace.scan_id && series.x.length > 0);
      return {
        key: trace.scan_id ?? `${trace.name} ${instrument} ${place}`,
        scanId: trace.scan_id,
        file: trace.name,
        instrument,
        rateKPerS: signed === null || signed === 0 ? null : Math.abs(signed),
        isCooling: signed !== null && signed < 0,
        ...(trace.time_s && { holdK: trace.x.reduce((sum, temperatureK) => sum + temperatureK, 0) / trace.x.length }),
        trace: overTime(trace),
        baseline: under && overTime(under),
        rows,
      };
    })
    .sort(
      (a, b) =>
        (a.holdK ?? 0) - (b.holdK ?? 0) || (a.rateKPerS ?? 0) - (b.rateKPerS ?? 0) || (a.file < b.file ? -1 : 1),
    );
}

const overTime = (series: CurveSeries): CurveSeries => (series.time_s ? { ...series, x: series.time_s } : series);

/** Scans and holds apart: one axis does not fit both. */
export const partLanes = (lanes: readonly ScanLane[]): { scans: ScanLane[]; holds: ScanLane[] } => ({
  scans: lanes.filter((lane) => lane.holdK === undefined),
  holds: lanes.filter((lane) => lane.holdK !== undefined),
});

/** Conversion on ramps and on holds apart, those of holds over time. */
export function partConversion(curves: Curves): { conversion: Curves; holdConversion: Curves } {
  const holds = curves.series.filter((s) => s.time_s);
  return {
    conversion: { ...curves, series: curves.series.filter((s) => !s.time_s) },
    holdConversion: { ...curves, x: { quantity: 'time', unit: 's' }, series: holds.map(overTime) },
  };
}

const FORECAST_METHOD = /^(model_free|shared_law)(?:, |$)/;

/** Event and the rest of a name of the form `event 2, rest`. */
export function splitName(name: string): { event: number | undefined; rest: string } {
  const [, number, rest] = /^event (\d+)(?:, )?(.*)$/s.exec(name) ?? [];
  return number === undefined ? { event: undefined, rest: name } : { event: Number(number), rest };
}

/** The curves of each event, events in order; a series without an event belongs to all of them. */
export function curvesByEvent(curves: Curves): { event: number; series: (CurveSeries & { rest: string })[] }[] {
  const series = curves.series.map((s) => ({ ...s, ...splitName(s.name) }));
  const events = [...new Set(series.map((s) => s.event).filter((event) => event !== undefined))].sort((a, b) => a - b);
  return (events.length > 0 ? events : [1]).map((event) => ({
    event,
    series: series.filter((s) => s.event === undefined || s.event === event),
  }));
}

/**
 * Curves of one kind in figures that can be read: an event each, and where a method is named, a method each. What names the figure is
 * taken out of the names of its series.
 */
export function splitCurves(curves: Curves): { names: string[]; curves: Curves }[] {
  const events = curvesByEvent(curves);
  return events.flatMap(({ event, series }) => {
    const eventNames = events.length > 1 ? [`event ${event}`] : [];
    const methods = [...new Set(series.map((s) => FORECAST_METHOD.exec(s.rest)?.[1]))];
    return methods.map((method) => {
      const own = series.filter((s) => FORECAST_METHOD.exec(s.rest)?.[1] === method);
      const name = ({ rest }: { rest: string }): string =>
        rest.replace(FORECAST_METHOD, '').replace(/^conversion /, 'α = ') || rest;
      return {
        names: [
          ...eventNames,
          ...(method === undefined ? [] : [method.replace('_', ' ').replace('model free', 'model-free')]),
        ],
        curves: { ...curves, series: own.map((s) => ({ ...s, name: name(s) })) },
      };
    });
  });
}

/** Points of curves as rows for a CSV file. */
export function curveRows(curves: Curves): { columns: string[]; rows: Record<string, string | number | null>[] } {
  const hasBand = curves.series.some((s) => s.lower !== undefined);
  const hasUnit = curves.series.some((s) => s.unit !== undefined);
  const hasTime = curves.series.some((s) => s.time_s !== undefined);
  const hasBeyond = curves.series.some((s) => s.beyond_measured_K !== undefined);
  const columns = [
    'series',
    'instrument',
    `${curves.x.quantity} [${curves.x.unit}]`,
    `${curves.y.quantity} [${curves.y.unit}]`,
  ];
  if (hasUnit) columns.push('unit');
  if (hasTime) columns.push('time [s]');
  if (hasBand) columns.push('lower95', 'upper95');
  if (hasBeyond) columns.push('beyond_measured [K]');
  const rows = curves.series.flatMap((s) =>
    s.x.map((x, i) => ({
      series: s.name,
      instrument: s.instrument ?? null,
      [columns[2]]: x,
      [columns[3]]: s.y[i],
      ...(hasUnit && { unit: s.unit ?? null }),
      ...(hasTime && { 'time [s]': s.time_s?.[i] ?? null }),
      ...(hasBand && { lower95: s.lower?.[i] ?? null, upper95: s.upper?.[i] ?? null }),
      ...(hasBeyond && { 'beyond_measured [K]': s.beyond_measured_K?.[i] ?? null }),
    })),
  );
  return { columns, rows };
}
