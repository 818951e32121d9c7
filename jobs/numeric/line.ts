/** Weighted straight line y = intercept + slope x. */
export interface Line {
  slope: number;
  intercept: number;
  /** standard errors, from the scatter about the line (n − 2 degrees of freedom; 0 for n = 2) */
  slopeError: number;
  interceptError: number;
  /** weighted root mean square residual with n − 2 */
  scatter: number;
  residuals: Float64Array;
}

/**
 * Least squares with weights (∝ 1/variance; equal where none are given). Centred on the weighted mean, so that a narrow range of x costs no digits.
 * @throws RangeError for fewer than two distinct x
 */
export function fitLine(x: ArrayLike<number>, y: ArrayLike<number>, weights?: ArrayLike<number>): Line {
  const n = x.length;
  let sw = 0;
  let sx = 0;
  let sy = 0;
  for (let i = 0; i < n; i++) {
    const w = weights ? weights[i] : 1;
    sw += w;
    sx += w * x[i];
    sy += w * y[i];
  }
  const mx = sx / sw;
  const my = sy / sw;
  let sxx = 0;
  let sxy = 0;
  for (let i = 0; i < n; i++) {
    const w = weights ? weights[i] : 1;
    sxx += w * (x[i] - mx) ** 2;
    sxy += w * (x[i] - mx) * (y[i] - my);
  }
  if (!(sxx > 0)) throw new RangeError(`a line needs two distinct x; got ${n} at ${x[0]}`);
  const slope = sxy / sxx;
  const intercept = my - slope * mx;
  const residuals = new Float64Array(n);
  let sum = 0;
  for (let i = 0; i < n; i++) {
    residuals[i] = y[i] - my - slope * (x[i] - mx);
    sum += (weights ? weights[i] : 1) * residuals[i] ** 2;
  }
  const variance = n > 2 ? sum / (n - 2) : 0;
  return {
    slope,
    intercept,
    slopeError: Math.sqrt(variance / sxx),
    interceptError: Math.sqrt(variance * (1 / sw + (mx * mx) / sxx)),
    scatter: Math.sqrt((variance * n) / sw),
    residuals,
  };
}
