import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { halfQuantile, LEAST_DRAWS, LEAST_SHARE } from './band.ts';
import type { Instances } from './instances.ts';

/** One line of a diagram with its 95 % band; all arrays of one length, abscissa ascending. */
export interface DiagramLine {
  method: Instances['method'];
  conversion: number;
  x: Float64Array;
  y: Float64Array;
  lower: Float64Array;
  upper: Float64Array;
  /** How far the temperature of each point lies outside the measured ones, K */
  beyondMeasuredK: Float64Array;
}

/** A place of a diagram: a conversion, and ln of a rate in K/s. */
export interface HeatingAsk {
  conversion: number;
  lnRate: number;
}

/** Constant heating by one method. */
export interface Heating {
  method: DiagramLine['method'];
  /** Temperature at which each conversion is reached, with the ends of its 95 % band, K; NaN where it is not reached */
  answer(asked: readonly HeatingAsk[]): { K: number; lower: number; upper: number }[];
  /** ln of the rate in K/s at which a conversion is reached at a temperature */
  lnRateOf(conversion: number, temperatureK: number): number;
  /** ln of the rate that just reaches the critical conversion before melting */
  lnCriticalRate?: number;
}

export const DIAGRAM_CONVERSIONS: readonly number[] = [0.01, 0.5, 0.95];
/** Draws behind a diagram's bands: the spread of 100 is known to 7 %. */
const DIAGRAM_DRAWS = 100;

/** Places of the draws that a diagram counts, evenly chosen. */
export const drawsOf = (count: number): number[] => {
  const most = Math.min(count, DIAGRAM_DRAWS);
  return Array.from({ length: most }, (_, d) => Math.floor((d * count) / most));
};

/**
 * Half of the 95 % interval of Σ g_j p_j over drawn parameters p, to first order all that a diagram asks: their covariance is worked out once, and a
 * point costs its square form. 0 where too few draws make one. @param columns p_j of every draw; a gradient may be shorter
 */
export function createSpread(
  columns: readonly ArrayLike<number>[],
  degreesOfFreedom: number,
): (gradient: ArrayLike<number>) => number {
  const m = columns.length;
  const places = drawsOf(columns[0]?.length ?? 0);
  const isWhole = (d: number) => {
    for (let j = 0; j < m; j++) if (!Number.isFinite(columns[j][d])) return false;
    return true;
  };
  const whole = places.filter(isWhole);
  if (whole.length < LEAST_DRAWS || whole.length < LEAST_SHARE * places.length) return () => 0;
  const covariance = new Float64Array(m * m);
  const centred = columns.map((column) => {
    let mean = 0;
    for (let d = 0; d < whole.length; d++) mean += column[whole[d]] / whole.length;
    const own = new Float64Array(whole.length);
    for (let d = 0; d < whole.length; d++) own[d] = column[whole[d]] - mean;
    return own;
  });
  for (let i = 0; i < m; i++)
    for (let j = 0; j <= i; j++) {
      const [a, b] = [centred[i], centred[j]];
      let sum = 0;
      for (let d = 0; d < a.length; d++) sum += a[d] * b[d];
      covariance[i * m + j] = ((i === j ? 1 : 2) * sum) / (whole.length - 1);
    }
  const t = halfQuantile(degreesOfFreedom);
  return (gradient) => {
    let variance = 0;
    for (let i = 0; i < gradient.length; i++)
      for (let j = 0; j <= i; j++) variance += gradient[i] * gradient[j] * covariance[i * m + j];
    return t * Math.sqrt(Math.max(0, variance));
  };
}

export const beyondMeasured = ({ lowestMeasuredK, highestMeasuredK }: ForecastSource, temperatureK: number): number =>
  Math.max(0, lowestMeasuredK - temperatureK, temperatureK - highestMeasuredK);
