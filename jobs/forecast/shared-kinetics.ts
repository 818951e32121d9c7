import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { accumulate, lnIntegral, lnIntegralAlong, timeOfIntegral } from './programme.ts';
import type { RateCurve } from './rate-curve.ts';

/** Ends of the golden section, K. */
const FASTEST_WITHIN_K = 1e-6;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/**
 * JMAK with K(T) of the shared law: α = 1 − exp[−(∫K dt)^n], so ln ∫K dt = ln X/n, and t = [−ln(1 − α)]^(1/n)/K(T) at a constant
 * temperature.
 * @param fastestK temperature of the largest K, where the driving force makes one; looked for when it is asked for
 */
export function sharedKinetics(curve: RateCurve, fastestK = (): number => TEMPERATURE_RANGE.highest): Kinetics {
  const { exponent } = curve;
  let fastest: number | undefined;
  return {
    lnTime: (conversion, T) => extentOf(conversion) / exponent - curve.lnRate(T),
    extent: (T, timeS) => exponent * (curve.lnRate(T) + Math.log(timeS)),
    timeOn: (panels, conversion, done = accumulate(panels, curve.lnRate)) =>
      timeOfIntegral(panels, done, curve.lnRate, extentOf(conversion) / exponent),
    extentOn: (panels, done) => exponent * (done ? lnIntegral(done) : lnIntegralAlong(panels, curve.lnRate)),
    lnRate: curve.lnRate,
    steepness: curve.steepness,
    breaksK: curve.breaksK,
    get fastestK() {
      fastest ??= fastestK();
      return fastest;
    },
    mostConversion: 1 - 1e-12,
  };
}

/** Temperature of the largest K between two temperatures, to 1e-6 K (golden section; ln K rises, then falls to melting). */
export function findFastest(lnRate: (temperatureK: number) => number, fromK: number, meltingK: number): number {
  let [a, b] = [fromK, meltingK];
  let [c, d] = [b - GOLDEN * (b - a), a + GOLDEN * (b - a)];
  let [atC, atD] = [lnRate(c), lnRate(d)];
  // One of the two inner points of a golden section is one of the next: a step asks once.
  while (b - a > FASTEST_WITHIN_K) {
    if (atC > atD) {
      [b, d, atD] = [d, c, atC];
      c = b - GOLDEN * (b - a);
      atC = lnRate(c);
    } else {
      [a, c, atC] = [c, d, atD];
      d = a + GOLDEN * (b - a);
      atD = lnRate(d);
    }
  }
  return (a + b) / 2;
}
