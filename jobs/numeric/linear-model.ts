import { solveSymmetric } from './linear-solve.ts';

export interface LinearModel {
  parameters: Float64Array;
  /** p × p, residual variance × (XᵀWX)⁻¹ with n − p degrees of freedom */
  covariance: Float64Array;
  sumOfSquares: number;
  residuals: Float64Array;
}

/**
 * Weighted linear least squares y = X b. Columns are centred by the caller where digits matter.
 * @param design n × p, row-major   @param weights ∝ 1/variance; equal where none are given
 * @throws RangeError when the columns are not independent
 */
export function fitLinearModel(
  design: Float64Array,
  y: ArrayLike<number>,
  p: number,
  weights?: ArrayLike<number>,
): LinearModel {
  const n = y.length;
  const normal = new Float64Array(p * p);
  const rhs = new Float64Array(p);
  for (let i = 0; i < n; i++) {
    const w = weights ? weights[i] : 1;
    for (let a = 0; a < p; a++) {
      const v = w * design[i * p + a];
      rhs[a] += v * y[i];
      for (let b = 0; b <= a; b++) normal[a * p + b] += v * design[i * p + b];
    }
  }
  for (let a = 0; a < p; a++) for (let b = 0; b < a; b++) normal[b * p + a] = normal[a * p + b];
  if (!solveSymmetric(normal, rhs, p)) throw new RangeError(`${p} columns over ${n} rows are not independent`);
  const residuals = new Float64Array(n);
  let sumOfSquares = 0;
  for (let i = 0; i < n; i++) {
    let fitted = 0;
    for (let a = 0; a < p; a++) fitted += design[i * p + a] * rhs[a];
    residuals[i] = y[i] - fitted;
    sumOfSquares += (weights ? weights[i] : 1) * residuals[i] ** 2;
  }
  const variance = n > p ? sumOfSquares / (n - p) : 0;
  return { parameters: rhs, covariance: normal.map((v) => v * variance), sumOfSquares, residuals };
}

/**
 * By how much the variance of a fitted parameter grows because neighbouring residuals go together: (1 + ρ)/(1 − ρ), ρ the correlation of
 * each residual with the next, never below 1 (first-order autoregression; Bartlett 1946, J. R. Stat. Soc. Suppl. 8:27).
 */
export function autocorrelationInflation(residuals: ArrayLike<number>): number {
  let product = 0;
  let square = 0;
  for (let i = 0; i < residuals.length; i++) {
    square += residuals[i] ** 2;
    if (i > 0) product += residuals[i] * residuals[i - 1];
  }
  const rho = square > 0 ? Math.min(0.98, Math.max(0, product / square)) : 0;
  return (1 + rho) / (1 - rho);
}
