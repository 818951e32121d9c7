import { fitLocalPolynomial } from '../numeric/local-polynomial.ts';
import type { EventWindow } from './window.ts';

/** Value, slope and curvature of a signal on the bins of a window, from local cubics. */
export interface Smoothed {
  value: Float64Array;
  slope: Float64Array;
  curvature: Float64Array;
  /** standard errors ÷ noise of one bin, in the middle of the window */
  valueNoise: number;
  slopeNoise: number;
}

/** Steps that differ by less than this part count as even: the shift it makes is far below a bin. */
const EVEN = 1e-3;

/**
 * Local cubics through the bins within ± half of each bin [from, to) (Savitzky & Golay 1964). On even bins one set of weights serves all
 * of them; on uneven ones, and at the ends, each bin has its own fit.
 */
export function smoothSignal(t: Float64Array, e: Float64Array, from: number, to: number, half: number): Smoothed {
  const n = t.length;
  const out = { value: new Float64Array(n), slope: new Float64Array(n), curvature: new Float64Array(n) };
  const step = (t[n - 1] - t[0]) / (n - 1);
  const m = Math.floor(half / step + 1e-9);
  const weights = m >= 2 && isEven(t, step) ? cubicWeights(m, step) : undefined;
  for (let i = from; i < to; i++) {
    if (weights && i >= m && i + m < n) {
      out.value[i] = weigh(weights.value, e, i - m);
      out.slope[i] = weigh(weights.slope, e, i - m);
      out.curvature[i] = weigh(weights.curvature, e, i - m);
    } else {
      const f = fitLocalPolynomial(t, e, t[i], half, 3, i);
      out.value[i] = f.value;
      out.slope[i] = f.slope;
      out.curvature[i] = f.curvature;
    }
  }
  const middle = Math.min(n - 1, (from + to) >> 1);
  const { valueNoise, slopeNoise } = fitLocalPolynomial(t, e, t[middle], half, 3, middle);
  return { valueNoise, slopeNoise, ...out };
}

function weigh(weights: Float64Array, y: Float64Array, from: number): number {
  let sum = 0;
  for (let k = 0; k < weights.length; k++) sum += weights[k] * y[from + k];
  return sum;
}

function isEven(t: Float64Array, step: number): boolean {
  for (let i = 1; i < t.length; i++) if (Math.abs(t[i] - t[i - 1] - step) > EVEN * step) return false;
  return true;
}

/** Closed form for 2m + 1 even points: orthogonal polynomials to third degree, evaluated in the middle. */
function cubicWeights(m: number, step: number) {
  const count = 2 * m + 1;
  let [s2, s4, s6] = [0, 0, 0];
  for (let k = 1; k <= m; k++) {
    s2 += 2 * k ** 2;
    s4 += 2 * k ** 4;
    s6 += 2 * k ** 6;
  }
  const even = count * s4 - s2 * s2;
  const odd = s2 * s6 - s4 * s4;
  const value = new Float64Array(count);
  const slope = new Float64Array(count);
  const curvature = new Float64Array(count);
  for (let k = -m; k <= m; k++) {
    value[k + m] = (s4 - s2 * k ** 2) / even;
    slope[k + m] = odd > 0 ? (s6 * k - s4 * k ** 3) / odd / step : 0;
    curvature[k + m] = (2 * (count * k ** 2 - s2)) / even / step ** 2;
  }
  return { value, slope, curvature };
}

/** Cubic Hermite value and slope between bins at time t. */
export function valueAt(
  w: EventWindow,
  s: Smoothed,
  t: number,
  hint: number,
): { value: number; slope: number; curvature: number } {
  let i = Math.min(Math.max(hint, 0), w.t.length - 2);
  while (i > 0 && w.t[i] > t) i--;
  while (i < w.t.length - 2 && w.t[i + 1] < t) i++;
  const h = w.t[i + 1] - w.t[i];
  const f = (t - w.t[i]) / h;
  const g = 1 - f;
  const value =
    s.value[i] * g * g * (1 + 2 * f) +
    s.value[i + 1] * f * f * (1 + 2 * g) +
    h * f * g * (s.slope[i] * g - s.slope[i + 1] * f);
  return {
    value,
    slope: s.slope[i] * g + s.slope[i + 1] * f,
    curvature: s.curvature[i] * g + s.curvature[i + 1] * f,
  };
}
