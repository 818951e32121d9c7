/** Order statistics and robust scatter of small arrays. */

/** Median; NaN for none. Copies. */
export function median(values: ArrayLike<number>): number {
  const n = values.length;
  if (n === 0) return Number.NaN;
  const copy = Float64Array.from(values);
  const half = n >> 1;
  const upper = selectInPlace(copy, half);
  if (n % 2) return upper;
  let lower = copy[0];
  for (let i = 1; i < half; i++) if (copy[i] > lower) lower = copy[i];
  return (lower + upper) / 2;
}

/** The k-th smallest value; everything before index k is then no larger (Hoare 1961, selection). NaN sorts nowhere: none may be in. */
function selectInPlace(a: Float64Array, k: number): number {
  let low = 0;
  let high = a.length - 1;
  while (low < high) {
    const pivot = a[(low + high) >> 1];
    let i = low;
    let j = high;
    while (i <= j) {
      while (a[i] < pivot) i++;
      while (a[j] > pivot) j--;
      if (i > j) break;
      const swapped = a[i];
      a[i++] = a[j];
      a[j--] = swapped;
    }
    if (k <= j) high = j;
    else if (k >= i) low = i;
    else break;
  }
  return a[k];
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
