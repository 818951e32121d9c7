/** Order statistics and robust scatter of small arrays. */

/** Median; NaN for none. Copies. */
export function median(values: ArrayLike<number>): number {
  const n = values.length;
  if (n === 0) return Number.NaN;
  const sorted = Float64Array.from(values).sort();
  const half = n >> 1;
  return n % 2 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2;
}

/** Standard deviation estimated from the median absolute deviation (× 1.4826, exact for a normal distribution). */
export function robustSigma(values: ArrayLike<number>): number {
  const m = median(values);
  const deviations = new Float64Array(values.length);
  for (let i = 0; i < values.length; i++) deviations[i] = Math.abs(values[i] - m);
  return 1.4826 * median(deviations);
}

export function mean(values: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i];
  return sum / values.length;
}

/** Sample standard deviation (n − 1). */
export function standardDeviation(values: ArrayLike<number>): number {
  const m = mean(values);
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += (values[i] - m) ** 2;
  return Math.sqrt(sum / (values.length - 1));
}
