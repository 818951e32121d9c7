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
 * Scatter about a fit, per instrument: the s² at which Σ residual²/(own² + s²) equals the degrees of freedom n_j − Σ leverage (Paule & Mandel
 * 1982, J. Res. NBS 87:377), drawn towards that of all scans where those of an instrument are few. Weighted, since a scan with a wide event
 * says little about the scatter of the sharp ones.
 */
export function estimateScatter(
  d: LawData,
  own: Float64Array,
  residualK: ArrayLike<number>,
  leverage: ArrayLike<number>,
): Scatter {
  const degrees = new Float64Array(d.instruments);
  for (let i = 0; i < d.n; i++) degrees[d.instrument[i]] += 1 - leverage[i];
  const total = degrees.reduce((a, b) => a + b, 0);
  const pooled = matchScatter(d, own, residualK, Math.max(LEAST_DEGREES, total), -1);
  const varianceK2 = degrees.map((v, j) => {
    if (d.instruments === 1) return pooled;
    return (v * matchScatter(d, own, residualK, Math.max(LEAST_DEGREES, v), j) + SHRINK * pooled) / (v + SHRINK);
  });
  return { varianceK2, degrees: degrees.map((v) => Math.max(LEAST_DEGREES, v)) };
}

/** s² of one instrument, or of all (−1), by Newton from below on a convex falling function: it cannot overshoot. */
function matchScatter(d: LawData, own: Float64Array, residualK: ArrayLike<number>, degrees: number, j: number): number {
  let s2 = 0;
  for (let round = 0; round < 40; round++) {
    let sum = 0;
    let slope = 0;
    for (let i = 0; i < d.n; i++) {
      if (j >= 0 && d.instrument[i] !== j) continue;
      const v = own[i] * own[i] + s2;
      const term = (residualK[i] * residualK[i]) / v;
      sum += term;
      slope += term / v;
    }
    if (sum <= degrees) break;
    const step = (sum - degrees) / slope;
    // In 1/(own² + s²) the function is nearly straight: Newton in that variable is a step longer by sum/degrees.
    const longer = step * (sum / degrees);
    s2 += longer;
    if (longer < 1e-4 * s2) break;
  }
  return s2;
}

/** Sets the variance of every temperature from its own error and its instrument's scatter. */
export function applyScatter(d: LawData, own: Float64Array, scatter: Scatter): void {
  for (let i = 0; i < d.n; i++) d.variance[i] = own[i] ** 2 + scatter.varianceK2[d.instrument[i]];
}

/** A combination of parameters: weight by index. */
export type Combination = readonly (readonly [at: number, weight: number])[];

/**
 * Degrees of freedom behind the standard error of a combination of parameters (Satterthwaite 1946, Biometrics Bull. 2:110): each
 * instrument's share of the variance counts with the scatter's own degrees of freedom, the priors' share as known.
 */
export function effectiveDegrees(d: LawData, fit: LawFit, of: number | Combination, degrees: Float64Array): number {
  const { inverse, jacobian, layout } = fit;
  if (!inverse) return LEAST_DEGREES;
  const { p, rows } = layout;
  const along = new Float64Array(p);
  for (const [at, weight] of typeof of === 'number' ? [[of, 1] as const] : of) {
    for (let b = 0; b < p; b++) along[b] += weight * inverse[at * p + b];
  }
  const shares = new Float64Array(d.instruments);
  let total = 0;
  for (let k = 0; k < rows; k++) {
    let c = 0;
    for (let b = 0; b < p; b++) c += along[b] * jacobian[k * p + b];
    total += c * c;
    if (k < d.n) shares[d.instrument[k]] += c * c;
  }
  let sum = 0;
  for (let j = 0; j < d.instruments; j++) sum += shares[j] ** 2 / degrees[j];
  return Math.max(1, Math.min(1e4, (total * total) / sum));
}
