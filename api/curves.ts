import type { ResultRow } from '../jobs/store/index.ts';
import type { CurveKind } from '../schema/wire/curve-kinds.ts';
import { CONVERSION_GRID, type ReducedScan } from '../schema/wire/reduced.ts';
import { GAS_CONSTANT } from '../schema/wire/units.ts';
import type { PlotCurve } from '../schema/wire/verdicts.ts';
import type { CurveSeries, Curves } from './shapes/curves.ts';

/** One reduced scan with what names its curves. */
export interface ReducedSampleScan {
  id: string;
  file: string;
  instrument: string;
  reduced: ReducedScan;
}

const TEMPERATURE = { quantity: 'temperature', unit: 'K' };
const CONVERSION = { quantity: 'conversion', unit: '1' };

/** Axes of each kind; a thermogram's unit is that of the file, which each series tells; that of growth on whether a growth rate is. */
export const CURVE_AXES: Record<CurveKind, Pick<Curves, 'x' | 'y'>> = {
  thermogram: { x: TEMPERATURE, y: { quantity: 'heat flow, exothermic up', unit: 'W or W/kg' } },
  baseline: { x: TEMPERATURE, y: { quantity: 'baseline of the heat flow, exothermic up', unit: 'W or W/kg' } },
  conversion: { x: TEMPERATURE, y: CONVERSION },
  kissinger: {
    x: { quantity: 'reciprocal peak temperature', unit: '1/K' },
    y: { quantity: 'ln(heating rate / peak temperature squared)', unit: 'ln(1/(K s))' },
  },
  energy: { x: CONVERSION, y: { quantity: 'activation energy', unit: 'kJ/mol' } },
  local_energy: { x: TEMPERATURE, y: { quantity: 'local activation energy', unit: 'kJ/mol' } },
  growth: { x: { quantity: 'log10 viscosity', unit: 'Pa s' }, y: { quantity: 'log10 K', unit: '1/s' } },
  viscosity: { x: { quantity: 'Tg/T', unit: '1' }, y: { quantity: 'log10 viscosity', unit: 'Pa s' } },
  ttt: { x: TEMPERATURE, y: { quantity: 'time', unit: 's' } },
  constant_heating: { x: { quantity: 'heating rate', unit: 'K/s' }, y: TEMPERATURE },
};

/** Rounds to a millionth of the largest size: beyond any noise, and half the bytes. */
function createRounding(values: Float64Array): (value: number) => number {
  let size = 0;
  for (const value of values) if (Math.abs(value) > size) size = Math.abs(value);
  const digits = 6 - Math.ceil(Math.log10(size || 1));
  // Dividing by a whole power of ten gives the shortest decimal; multiplying by its inverse would not.
  const factor = 10 ** Math.abs(digits);
  return digits >= 0 ? (value) => Math.round(value * factor) / factor : (value) => Math.round(value / factor) * factor;
}

/** Heat flow of each scan as it was analysed, or the baseline under its event: not a number elsewhere, so left out there. */
export function traceSeries(scans: ReducedSampleScan[], column: 'heatFlow' | 'baseline'): CurveSeries[] {
  return scans.map(({ id, file, instrument, reduced: { trace, heatFlowUnit } }) => {
    const x: number[] = [];
    const y: number[] = [];
    const timeS: number[] = [];
    const round = createRounding(trace[column]);
    const roundTime = createRounding(trace.timeS ?? new Float64Array(0));
    trace[column].forEach((value, i) => {
      if (!Number.isFinite(value)) return;
      x.push(Math.round(trace.temperatureK[i] * 1000) / 1000);
      y.push(round(value));
      if (trace.timeS) timeS.push(roundTime(trace.timeS[i]));
    });
    return {
      name: file,
      instrument,
      scan_id: id,
      x,
      y,
      unit: heatFlowUnit,
      ...(trace.timeS && { time_s: timeS }),
    };
  });
}

/** Pieces of an outline: two points each, about one a px of a plot. */
const OUTLINE_PIECES = 200;

/** A curve as a first look needs it: of each piece the lowest and the highest point, in their order, and both ends. */
export function outlineOf(series: CurveSeries): CurveSeries {
  const count = series.x.length;
  if (count <= 2 * OUTLINE_PIECES) return series;
  const kept = new Set([0, count - 1]);
  for (let piece = 0; piece < OUTLINE_PIECES; piece++) {
    const from = Math.floor((piece * count) / OUTLINE_PIECES);
    const to = Math.floor(((piece + 1) * count) / OUTLINE_PIECES);
    let low = from;
    let high = from;
    for (let i = from + 1; i < to; i++) {
      if (series.y[i] < series.y[low]) low = i;
      if (series.y[i] > series.y[high]) high = i;
    }
    kept.add(low).add(high);
  }
  const places = [...kept].sort((a, b) => a - b);
  const of = (column: number[]) => places.map((i) => column[i]);
  return { ...series, x: of(series.x), y: of(series.y), ...(series.time_s && { time_s: of(series.time_s) }) };
}

/** α(T) of every event that has a curve; of a hold also its times from the start of the hold. */
export function conversionSeries(scans: ReducedSampleScan[]): CurveSeries[] {
  return scans.flatMap(({ id, file, instrument, reduced }) =>
    reduced.events.flatMap(({ event, curve, holdReachedS }) =>
      curve
        ? [
            {
              name: `${file}, event ${event}`,
              instrument,
              scan_id: id,
              x: [...curve.temperatureK],
              y: [...CONVERSION_GRID],
              ...(holdReachedS !== undefined && { time_s: [...curve.timeS].map((timeS) => timeS - holdReachedS) }),
            },
          ]
        : [],
    ),
  );
}

/** Groups in the order of first appearance. */
function groupBy<T>(rows: T[], keyOf: (row: T) => string): [string, T[]][] {
  const groups = new Map<string, T[]>();
  for (const row of rows) groups.set(keyOf(row), [...(groups.get(keyOf(row)) ?? []), row]);
  return [...groups];
}

/**
 * Kissinger 1957: ln(β/Tp²) against 1/Tp, one series an event and instrument, and where the fit gave E and ln A its
 * line ln(A R/E) − E/(R Tp) over the points of the event.
 * @param scans rows of the scans table @param parameters rows of the parameters table, both of one sample
 */
export function kissingerSeries(scans: ResultRow[], parameters: ResultRow[]): CurveSeries[] {
  const peaks = scans.filter(
    (r) => r.role === 'sample' && r.status === 'reduced' && Number(r.peak_K) > 0 && Number(r.rate_K_per_s) > 0,
  );
  const x = (r: ResultRow) => 1 / Number(r.peak_K);
  const measured = groupBy(peaks, (r) => `event ${r.event}, ${r.instrument}`).map(([name, rows]) => ({
    name,
    instrument: String(rows[0].instrument),
    x: rows.map(x),
    y: rows.map((r) => Math.log(Number(r.rate_K_per_s) / Number(r.peak_K) ** 2)),
  }));
  const headline = (event: string, quantity: string) =>
    parameters.find(
      (p) =>
        String(p.event) === event &&
        p.method === 'kissinger' &&
        p.quantity === quantity &&
        p.variant === '' &&
        p.interval === 'monte_carlo',
    )?.value;
  const lines = groupBy(peaks, (r) => String(r.event)).flatMap(([event, rows]) => {
    const energyKJPerMol = headline(event, 'activation_energy');
    const lnPrefactor = headline(event, 'ln_prefactor');
    if (typeof energyKJPerMol !== 'number' || typeof lnPrefactor !== 'number') return [];
    const energyK = (energyKJPerMol * 1000) / GAS_CONSTANT;
    const ends = [Math.min(...rows.map(x)), Math.max(...rows.map(x))];
    return [
      { name: `event ${event}, fit`, x: ends, y: ends.map((u) => lnPrefactor - Math.log(energyK) - energyK * u) },
    ];
  });
  return [...measured, ...lines];
}

/** Isoconversional activation energies against conversion with their 95 % intervals, one series an event and method. */
export function energySeries(parameters: ResultRow[]): CurveSeries[] {
  const rows = parameters.filter(
    (p) =>
      p.quantity === 'activation_energy' &&
      typeof p.conversion === 'number' &&
      p.variant === '' &&
      p.interval === 'monte_carlo',
  );
  return groupBy(rows, (p) => `event ${p.event}, ${p.method}`).map(([name, points]) => {
    const bounded = points.every((p) => typeof p.lower95 === 'number' && typeof p.upper95 === 'number');
    return {
      name,
      x: points.map((p) => Number(p.conversion)),
      y: points.map((p) => Number(p.value)),
      ...(bounded && { lower: points.map((p) => Number(p.lower95)), upper: points.map((p) => Number(p.upper95)) }),
    };
  });
}

/** Plots behind the verdicts of one sample, event by event. */
type EventPlots = { event: number; plots: PlotCurve[] }[];

const namedByEvent = (event: number, { name, ...series }: PlotCurve['series'][number]): CurveSeries => ({
  name: `event ${event}, ${name}`,
  ...series,
});

/**
 * Behind each verdict: the points of each instrument with the lag that the bent law leaves to it removed, and the line of the material
 * under each of the four laws. The verdict counts its abscissa in 1000/T.
 */
export function kissingerLawSeries(judged: EventPlots): CurveSeries[] {
  return judged.flatMap(({ event, plots }) =>
    plots
      .filter((plot) => plot.kind === 'kissinger')
      .flatMap((plot) =>
        plot.series.map((series) =>
          namedByEvent(event, {
            ...series,
            name: series.instrument === undefined ? series.name : `${series.name}, lag removed`,
            x: series.x.map((v) => v / 1000),
          }),
        ),
      ),
  );
}

/** E_loc of the shared law against temperature with its 95 % band: the verdict counts it among its energies. */
export const localEnergySeries = (judged: EventPlots): CurveSeries[] =>
  judged.flatMap(({ event, plots }) =>
    plots
      .filter((plot) => plot.kind === 'energy')
      .flatMap((plot) => plot.series.map((series) => namedByEvent(event, series))),
  );

/** Growth against viscosity, or viscosity against Tg/T; with the axes of the plot, which know whether a growth rate anchors it. */
export function glassCurves(judged: EventPlots, kind: 'growth' | 'viscosity'): Pick<Curves, 'x' | 'y' | 'series'> {
  const found = judged.flatMap(({ event, plots }) =>
    plots.filter((plot) => plot.kind === kind).map((plot) => ({ event, plot })),
  );
  const { x, y } = found[0]?.plot ?? CURVE_AXES[kind];
  return { x, y, series: found.flatMap(({ event, plot }) => plot.series.map((series) => namedByEvent(event, series))) };
}
