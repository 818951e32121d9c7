import { scaledExponentialIntegral } from '../numeric/exponential-integral.ts';

/**
 * The temperature integral ∫_0^T exp(−E/(R T')) dT' = (E/R) p(x) = T h(x)/x · e^−x, with x = E/(R T), p(x) = ∫_x^∞ e^−u/u² du and
 * h(x) = x² e^x p(x) = x e^x E2(x), a slow function close to 1 − 2/x.
 */

/** h(x) = x² e^x p(x), to about 1e−15. */
export const temperatureIntegralFactor = (x: number): number => x * scaledExponentialIntegral(2, x);

/** p(x) = e^−x/x − E1(x), to about 1e−15 relative (underflows above x = 745). */
export const temperatureIntegral = (x: number): number => (temperatureIntegralFactor(x) * Math.exp(-x)) / (x * x);

/**
 * h(x) by the rational approximation of fourth degree of Senum & Yang 1977 (J. Thermal Anal. 11:445) with the numerator's
 * 86 x (88 in a widely copied misprint): for inner loops. Relative error under 1e−6 for x ≥ 10 and 1e−7 for x ≥ 15.
 */
export function temperatureIntegralFactorFast(x: number): number {
  return (x * (x * (x * (x + 18) + 86) + 96)) / (x * (x * (x * (x + 20) + 120) + 240) + 120);
}
