import type { Accumulated, Panels } from './programme.ts';

/**
 * A rate law with its numbers filled in (the estimate, or one draw), as the questions need it. Extents are ln X, X = −ln(1 − α): they stay
 * exact for the smallest conversions, and their scatter is even.
 */
export interface Kinetics {
  /** ln of the time in s to a conversion at a constant temperature; +∞ where nothing happens */
  lnTime(conversion: number, temperatureK: number): number;
  /** ln X after a time at a constant temperature */
  extent(temperatureK: number, timeS: number): number;
  /**
   * s from the programme's start; past its end the programme is taken to stay at its last temperature
   * @param done `accumulate` of these panels and this law's `lnRate`, where it is at hand
   */
  timeOn(panels: Panels, conversion: number, done?: Accumulated): number;
  /** ln X at the programme's end */
  extentOn(panels: Panels, done?: Accumulated): number;
  /** ln of a rate coefficient, for the weight of temperatures and the distance in decades */
  lnRate(temperatureK: number): number;
  /** J/mol, for the length of panels */
  steepness(temperatureK: number): number;
  breaksK: readonly number[];
  /** Above it the time to a conversion no longer falls with temperature, K */
  fastestK: number;
  /** Largest conversion it describes */
  mostConversion: number;
}

/** ln X of a conversion. @throws RangeError outside (0, most] */
export function extentOf(conversion: number, most = 1 - 1e-12): number {
  if (!(conversion > 0 && conversion <= most)) throw new RangeError(`conversion not in (0, ${most}]: ${conversion}`);
  return Math.log(-Math.log1p(-conversion));
}

export const conversionOf = (extent: number): number => -Math.expm1(-Math.exp(extent));

/** Highest temperature looked at where no melting temperature is known, and the lowest, K. */
export const TEMPERATURE_RANGE = { lowest: 20, highest: 3000 } as const;
