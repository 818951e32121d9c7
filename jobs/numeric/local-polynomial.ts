import { solveSymmetric } from './linear-solve.ts';

/** Value, first and second derivative of a local polynomial, and the factor by which white noise of the points enters each. */
export interface LocalFit {
  value: number;
  slope: number;
  curvature: number;
  third: number;
  /** standard error ÷ noise of one point */
  valueNoise: number;
  slopeNoise: number;
  curvatureNoise: number;
  points: number;
}

const LARGEST = 4;
/** Working room: hundreds of local fits a scan. */
const normals = [0, 1, 2, 3, 4].map((p) => new Float64Array(p * p));
const right = new Float64Array(LARGEST);
const powers = new Float64Array(2 * LARGEST - 1);

/**
 * Least-squares polynomial through the points within ± half of `at` (Savitzky & Golay 1964 on the actual abscissae, which may be
 * uneven). The window grows until it holds degree + 2 points.
 * @param x increasing
 * @param half half width, in units of x
 * @param hint any index near `at`, to save the search
 */
export function fitLocalPolynomial(
  x: Float64Array,
  y: Float64Array,
  at: number,
  half: number,
  degree: 2 | 3,
  hint = lowerBound(x, at),
): LocalFit {
  const n = x.length;
  let from = Math.min(Math.max(hint, 0), n - 1);
  while (from > 0 && x[from - 1] >= at - half) from--;
  while (from < n - 1 && x[from] < at - half) from++;
  let to = from;
  while (to < n && x[to] <= at + half) to++;
  const least = Math.min(degree + 2, n);
  while (to - from < least) {
    if (to >= n || (from > 0 && at - x[from - 1] < x[to] - at)) from--;
    else to++;
  }
  const p = Math.min(degree, to - from - 1) + 1;
  const normal = normals[p];
  const rhs = right.fill(0);
  const unit = Math.max(half, x[to - 1] - at, at - x[from]);
  const power = powers.fill(0);
  for (let i = from; i < to; i++) {
    const u = (x[i] - at) / unit;
    let v = 1;
    for (let k = 0; k < 2 * p - 1; k++) {
      power[k] += v;
      if (k < p) rhs[k] += v * y[i];
      v *= u;
    }
  }
  for (let i = 0; i < p; i++) for (let k = 0; k < p; k++) normal[i * p + k] = power[i + k];
  if (!solveSymmetric(normal, rhs, p)) {
    return {
      value: y[from],
      slope: 0,
      curvature: 0,
      third: 0,
      valueNoise: 1,
      slopeNoise: Number.POSITIVE_INFINITY,
      curvatureNoise: Number.POSITIVE_INFINITY,
      points: to - from,
    };
  }
  return {
    value: rhs[0],
    slope: p > 1 ? rhs[1] / unit : 0,
    curvature: p > 2 ? (2 * rhs[2]) / (unit * unit) : 0,
    third: p > 3 ? (6 * rhs[3]) / unit ** 3 : 0,
    valueNoise: Math.sqrt(normal[0]),
    slopeNoise: p > 1 ? Math.sqrt(normal[p + 1]) / unit : Number.POSITIVE_INFINITY,
    curvatureNoise: p > 2 ? (2 * Math.sqrt(normal[2 * p + 2])) / (unit * unit) : Number.POSITIVE_INFINITY,
    points: to - from,
  };
}

/** First index with x[i] ≥ value (x.length when there is none). */
export function lowerBound(x: Float64Array, value: number): number {
  let low = 0;
  let high = x.length;
  while (low < high) {
    const mid = (low + high) >> 1;
    if (x[mid] < value) low = mid + 1;
    else high = mid;
  }
  return low;
}

/** Linear interpolation of y at `at`; clamps to the ends. */
export function interpolate(x: Float64Array, y: Float64Array, at: number): number {
  const i = lowerBound(x, at);
  if (i <= 0) return y[0];
  if (i >= x.length) return y[x.length - 1];
  const f = (at - x[i - 1]) / (x[i] - x[i - 1]);
  return y[i - 1] + f * (y[i] - y[i - 1]);
}
