/**
 * The shape that a JMAK event on a ramp is close to whatever its n and E: g(v) = exp(v + 1 − e^v), v = n E (T − Tp)/(R Tp²), height 1 at v = 0
 * (limit of large E/(R T)). It is used where the signal itself cannot be: for the foot of an event under a flank, and for
 * the tail that a melting endotherm hides.
 */

/** g = ½ here: half widths in units of v. */
export const LEFT_HALF = 1.4612;
export const RIGHT_HALF = 0.985;
/** Conversion of the shape at its right half height, 1 − exp(−e^v). */
export const CONVERSION_AT_RIGHT_HALF = 1 - Math.exp(-Math.exp(RIGHT_HALF));
/** Conversion at the peak. */
export const CONVERSION_AT_PEAK = 1 - Math.exp(-1);

export interface Foot {
  peakS: number;
  height: number;
  /** left half width at half maximum, s */
  leftS: number;
}

/** Height of the foot at time t before the peak, signal units. */
export function footAt({ peakS, height, leftS }: Foot, t: number): number {
  const v = ((t - peakS) * LEFT_HALF) / leftS;
  return height * Math.exp(v + 1 - Math.exp(v));
}

/** ∫ of the foot up to t, signal units × s. */
export function footArea({ peakS, height, leftS }: Foot, t: number): number {
  const v = ((t - peakS) * LEFT_HALF) / leftS;
  return ((height * Math.E * leftS) / LEFT_HALF) * -Math.expm1(-Math.exp(v));
}
