import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { accumulate, lnIntegral, timeOfIntegral } from './programme.ts';
import type { RateCurve } from './rate-curve.ts';

/**
 * JMAK with K(T) of the shared law: α = 1 − exp[−(∫K dt)^n], so ln ∫K dt = ln X/n, and t = [−ln(1 − α)]^(1/n)/K(T) at a constant
 * temperature.
 * @param fastestK temperature of the largest K, where the driving force makes one
 */
export function sharedKinetics(curve: RateCurve, fastestK: number = TEMPERATURE_RANGE.highest): Kinetics {
  const { exponent } = curve;
  return {
    lnTime: (conversion, T) => extentOf(conversion) / exponent - curve.lnRate(T),
    extent: (T, timeS) => exponent * (curve.lnRate(T) + Math.log(timeS)),
    timeOn: (panels, conversion) =>
      timeOfIntegral(panels, accumulate(panels, curve.lnRate), curve.lnRate, extentOf(conversion) / exponent),
    extentOn: (panels) => exponent * lnIntegral(accumulate(panels, curve.lnRate)),
    lnRate: curve.lnRate,
    steepness: curve.steepness,
    breaksK: curve.breaksK,
    fastestK,
    mostConversion: 1 - 1e-12,
  };
}

/** Temperature of the largest K between two temperatures, to 1e-6 K (golden section; ln K rises, then falls to melting). */
export function findFastest(lnRate: (temperatureK: number) => number, fromK: number, meltingK: number): number {
  const g = (Math.sqrt(5) - 1) / 2;
  let [a, b] = [fromK, meltingK];
  while (b - a > 1e-6) {
    const [c, d] = [b - g * (b - a), a + g * (b - a)];
    if (lnRate(c) > lnRate(d)) b = d;
    else a = c;
  }
  return (a + b) / 2;
}
