import { findRoot } from './root.ts';

/** Log-gamma for a > 0 (Lanczos g = 7, 9 terms; about 1e−15 relative). */
export function logGamma(a: number): number {
  const c = [
    0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
    12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
  ];
  if (a < 0.5) return Math.log(Math.PI / Math.sin(Math.PI * a)) - logGamma(1 - a);
  const z = a - 1;
  let sum = c[0];
  for (let i = 1; i < 9; i++) sum += c[i] / (z + i);
  const t = z + 7.5;
  return 0.5 * Math.log(2 * Math.PI) + (z + 0.5) * Math.log(t) - t + Math.log(sum);
}

/** Regularised incomplete beta function I_x(a, b) by Lentz's continued fraction (Abramowitz & Stegun 26.5.8). */
export function incompleteBeta(x: number, a: number, b: number): number {
  if (x <= 0) return 0;
  if (x >= 1) return 1;
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(1 - x, b, a);
  const front = Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x)) / a;
  const tiny = 1e-300;
  let c = 1;
  let d = 1 / (1 - ((a + b) * x) / (a + 1) || tiny);
  let h = d;
  for (let m = 1; m < 500; m++) {
    let step = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m));
    d = 1 / (1 + step * d || tiny);
    c = 1 + step / c || tiny;
    h *= d * c;
    step = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 / (1 + step * d || tiny);
    c = 1 + step / c || tiny;
    const delta = d * c;
    h *= delta;
    if (Math.abs(delta - 1) < 1e-15) break;
  }
  return front * h;
}

/** P(t ≤ x) of Student's distribution with `degrees` > 0 degrees of freedom. */
export function studentCumulative(x: number, degrees: number): number {
  const tail = 0.5 * incompleteBeta(degrees / (degrees + x * x), degrees / 2, 0.5);
  return x > 0 ? 1 - tail : tail;
}

/**
 * Quantile of Student's distribution: the t with P(≤ t) = probability, 0.5 < probability < 1.
 * @throws RangeError outside that range or for degrees ≤ 0
 */
export function studentQuantile(probability: number, degrees: number): number {
  if (!(probability > 0.5 && probability < 1)) throw new RangeError(`probability not in (0.5, 1): ${probability}`);
  if (!(degrees > 0)) throw new RangeError(`degrees of freedom not above 0: ${degrees}`);
  // In s = t/√(t²+ν) the bracket is finite for every ν.
  const root = findRoot(
    (s) => studentCumulative((s * Math.sqrt(degrees)) / Math.sqrt(1 - s * s), degrees) - probability,
    0,
    1 - 1e-15,
    1e-15,
  );
  return (root * Math.sqrt(degrees)) / Math.sqrt(1 - root * root);
}

/**
 * Quantile of Fisher's F distribution: the F with P(≤ F) = probability, 0 < probability < 1, by its incomplete beta function
 * (Abramowitz & Stegun 26.6.2).
 * @throws RangeError outside that range or for degrees ≤ 0
 */
export function fisherQuantile(probability: number, degrees1: number, degrees2: number): number {
  if (!(probability > 0 && probability < 1)) throw new RangeError(`probability not in (0, 1): ${probability}`);
  if (!(degrees1 > 0 && degrees2 > 0)) {
    throw new RangeError(`degrees of freedom not above 0: ${degrees1}, ${degrees2}`);
  }
  const x = findRoot((v) => incompleteBeta(v, degrees1 / 2, degrees2 / 2) - probability, 0, 1, 1e-15);
  return (x * degrees2) / ((1 - x) * degrees1);
}
