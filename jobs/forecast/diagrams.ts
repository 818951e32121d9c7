import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { bandOf, expFinite } from './band.ts';
import { type Instances, instancesOf } from './instances.ts';
import { extentOf, type Kinetics } from './kinetics.ts';
import { COARSE } from './programme.ts';
import { drawnParameters, sharedRateCurve } from './rate-curve.ts';

/** One line of a diagram with its 95 % band; all arrays of one length, abscissa ascending. */
export interface DiagramLine {
  method: Instances['method'];
  conversion: number;
  x: Float64Array;
  y: Float64Array;
  lower: Float64Array;
  upper: Float64Array;
}

export const DIAGRAM_CONVERSIONS: readonly number[] = [0.01, 0.5, 0.95];
/** Draws behind a diagram's bands: the spread of 100 is known to 7 %. */
const DIAGRAM_DRAWS = 100;
const DIAGRAM_POINTS = 81;
/** A diagram without an asked range reaches this far below and above the measured temperatures, K. */
const MARGIN_K = { below: 80, above: 40 };

const evenly = (from: number, to: number, count: number): Float64Array =>
  Float64Array.from({ length: count }, (_, i) => from + ((to - from) * i) / (count - 1));

const some = <T>(all: readonly T[], most: number): T[] => {
  const count = Math.min(all.length, most);
  return Array.from({ length: count }, (_, d) => all[Math.floor((d * all.length) / count)]);
};

/**
 * Time–temperature–transformation: time in s (y) to each conversion at constant temperature in K (x), by every method of the source. With melting data the line
 * of the shared law turns back at its nose, and the grid runs up to melting.
 */
export function drawTransformation(
  source: ForecastSource,
  conversions: readonly number[] = DIAGRAM_CONVERSIONS,
  rangeK: readonly [number, number] = defaultRange(source),
): DiagramLine[] {
  const grid = evenly(rangeK[0], rangeK[1], DIAGRAM_POINTS);
  return instancesOf(source).flatMap((m) =>
    conversions.map((conversion) => {
      const draws = some(m.draws, DIAGRAM_DRAWS);
      const pessimistic = m.pessimistic;
      return drawLine(m.method, conversion, grid, (T) => {
        const drawn = draws.map((k) => k.lnTime(conversion, T));
        const band = bandOf(m.estimate.lnTime(conversion, T), drawn, m.degreesOfFreedom);
        if (pessimistic && T < pessimistic.belowK)
          band.lower = Math.min(band.lower ?? band.value, pessimistic.kinetics.lnTime(conversion, T));
        return [band.value, band.lower ?? band.value, band.upper ?? band.value];
      });
    }),
  );
}

function drawLine(
  method: Instances['method'],
  conversion: number,
  x: Float64Array,
  at: (x: number) => [number, number, number],
): DiagramLine {
  const rows = Array.from(x, at);
  const kept = rows.flatMap((row, i) => (row.every(Number.isFinite) ? [i] : []));
  const column = (j: number) => Float64Array.from(kept, (i) => expFinite(rows[i][j]));
  return {
    method,
    conversion,
    x: Float64Array.from(kept, (i) => x[i]),
    y: column(0),
    lower: column(1),
    upper: column(2),
  };
}

function defaultRange({ lowestMeasuredK, highestMeasuredK, melting }: ForecastSource): readonly [number, number] {
  const low = Math.max(lowestMeasuredK / 2, lowestMeasuredK - MARGIN_K.below);
  return [low, melting ? melting.meltingK - 0.5 : highestMeasuredK + MARGIN_K.above];
}

/**
 * Constant heating: temperature in K (y) at which each conversion is reached on heating at a constant rate in K/s (x, ascending), by the shared
 * law. Empty without one.
 */
export function drawHeating(
  source: ForecastSource,
  ratesKPerS: readonly number[],
  conversions: readonly number[] = DIAGRAM_CONVERSIONS,
): DiagramLine[] {
  const { law, lawDraws, melting } = source;
  if (!law) return [];
  const topK = melting ? melting.meltingK : law.highestMeasuredK * 1.5;
  const make = (p: Parameters<typeof sharedRateCurve>[1]) => ({
    invert: createHeatingInverse(sharedRateCurve(law, p, melting), law.lowestMeasuredK / 2, topK),
    exponent: p.avramiExponent,
  });
  const estimate = make(law);
  const draws = some(
    Array.from({ length: lawDraws?.bend.length ?? 0 }, (_, d) => d),
    DIAGRAM_DRAWS,
  ).map((d) => make(drawnParameters(lawDraws!, d)));
  const x = Float64Array.from([...ratesKPerS].sort((a, b) => a - b));
  return conversions.map((conversion) => {
    const at = ({ invert, exponent }: typeof estimate, rate: number) =>
      invert(extentOf(conversion) / exponent + Math.log(rate));
    return drawLine('shared_law', conversion, x, (rate) => {
      const band = bandOf(
        Math.log(at(estimate, rate)),
        draws.map((d) => Math.log(at(d, rate))),
        source.degreesOfFreedom,
      );
      return [band.value, band.lower ?? band.value, band.upper ?? band.value];
    });
  });
}

/**
 * The temperature at which ∫K dT from far below reaches e^lnTarget (K in 1/s, target in K/s); NaN where it never does. The integral is laid out
 * once by Gauss–Legendre panels; between two nodes it is inverted by Newton on K itself.
 */
export function createHeatingInverse(
  curve: Pick<Kinetics, 'lnRate' | 'steepness' | 'breaksK'>,
  fromK: number,
  toK: number,
): (lnTarget: number) => number {
  const at: number[] = [fromK];
  const lnSums: number[] = [Number.NEGATIVE_INFINITY];
  const { nodes, weights, exponentSpan } = COARSE;
  const integral = (low: number, high: number) => {
    let highest = Number.NEGATIVE_INFINITY;
    const values = nodes.map((u) => curve.lnRate(low + u * (high - low)));
    for (const v of values) highest = Math.max(highest, v);
    if (highest === Number.NEGATIVE_INFINITY) return highest;
    return highest + Math.log((high - low) * values.reduce((s, v, k) => s + weights[k] * Math.exp(v - highest), 0));
  };
  while (at[at.length - 1] < toK) {
    const T = at[at.length - 1];
    const step = Math.min((exponentSpan / 2) * ((GAS_CONSTANT * T * T) / Math.max(curve.steepness(T), 1e3)), 0.02 * T);
    const next = Math.min(toK, T + step, ...curve.breaksK.filter((b) => b > T * (1 + 1e-12)));
    lnSums.push(addLogs(lnSums[lnSums.length - 1], integral(T, next)));
    at.push(next);
  }
  return (lnTarget) => {
    const j = lnSums.findIndex((s) => s >= lnTarget);
    if (j <= 0) return Number.NaN;
    const [low, high] = [at[j - 1], at[j]];
    let T = (low + high) / 2;
    for (let i = 0; i < 40; i++) {
      const excess = addLogs(lnSums[j - 1], integral(low, T)) - lnTarget;
      // d ln ∫/dT = K/∫ ≈ e^(ln K − target) near the root.
      const next = Math.min(high, Math.max(low + 1e-9, T - excess / Math.exp(curve.lnRate(T) - lnTarget)));
      if (Math.abs(next - T) < 1e-10 * T) return next;
      T = next;
    }
    return T;
  };
}

const addLogs = (a: number, b: number): number => {
  const [high, low] = a > b ? [a, b] : [b, a];
  return low === Number.NEGATIVE_INFINITY ? high : high + Math.log1p(Math.exp(low - high));
};
