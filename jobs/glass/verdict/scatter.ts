import type { LawData, LawFit } from './law-fit.ts';

/** K² and degrees of freedom of the scatter between scans, an instrument each. */
export interface Scatter {
  varianceK2: Float64Array;
  degrees: Float64Array;
}

/** An instrument's own scatter is drawn towards that of all by this many scans' worth. */
const SHRINK = 1;
const LEAST_DEGREES = 0.5;

/**
 * Scatter about a fit, per instrument: Σ residual²/(n_j − Σ leverage), drawn towards the pooled value where the scans of an instrument are
 * few. Relative to what each temperature's own error explains: variance of scan i = own² + scatter².
 */
export function estimateScatter(
  d: LawData,
  own: Float64Array,
  residualK: ArrayLike<number>,
  leverage: ArrayLike<number>,
): Scatter {
  const sums = new Float64Array(d.instruments);
  const degrees = new Float64Array(d.instruments);
  const known = new Float64Array(d.instruments);
  const count = new Float64Array(d.instruments);
  for (let i = 0; i < d.n; i++) {
    const j = d.instrument[i];
    sums[j] += residualK[i] ** 2;
    degrees[j] += 1 - leverage[i];
    known[j] += own[i] ** 2;
    count[j]++;
  }
  const total = degrees.reduce((a, b) => a + b, 0);
  const pooled = sums.reduce((a, b) => a + b, 0) / Math.max(LEAST_DEGREES, total);
  const varianceK2 = sums.map((s, j) => {
    const seen = (s + SHRINK * pooled) / (degrees[j] + SHRINK);
    return Math.max(0, seen - known[j] / count[j]);
  });
  return { varianceK2, degrees: degrees.map((v) => Math.max(LEAST_DEGREES, v)) };
}

/** Sets the variance of every temperature from its own error and its instrument's scatter. */
export function applyScatter(d: LawData, own: Float64Array, scatter: Scatter): void {
  for (let i = 0; i < d.n; i++) d.variance[i] = own[i] ** 2 + scatter.varianceK2[d.instrument[i]];
}

/**
 * Degrees of freedom behind the standard error of parameter `at` (Satterthwaite 1946, Biometrics Bull. 2:110): each instrument's share of
 * the variance counts with the scatter's own degrees of freedom, the priors' share as known.
 */
export function effectiveDegrees(d: LawData, fit: LawFit, at: number, degrees: Float64Array): number {
  const { inverse, jacobian, layout } = fit;
  if (!inverse) return LEAST_DEGREES;
  const { p, rows } = layout;
  const shares = new Float64Array(d.instruments);
  let total = 0;
  for (let k = 0; k < rows; k++) {
    let c = 0;
    for (let b = 0; b < p; b++) c += inverse[at * p + b] * jacobian[k * p + b];
    total += c * c;
    if (k < d.n) shares[d.instrument[k]] += c * c;
  }
  let sum = 0;
  for (let j = 0; j < d.instruments; j++) sum += shares[j] ** 2 / degrees[j];
  return Math.max(1, Math.min(1e4, (total * total) / sum));
}

