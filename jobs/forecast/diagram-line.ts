import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { bandOf } from './band.ts';
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

/** Half of the 95 % interval around a value; 0 where too few draws make one. */
export function halfOf(value: number, drawn: ArrayLike<number>, degreesOfFreedom: number): number {
  const { upper } = bandOf(value, drawn, degreesOfFreedom);
  return upper === undefined ? 0 : upper - value;
}

export const beyondMeasured = ({ lowestMeasuredK, highestMeasuredK }: ForecastSource, temperatureK: number): number =>
  Math.max(0, lowestMeasuredK - temperatureK, temperatureK - highestMeasuredK);
