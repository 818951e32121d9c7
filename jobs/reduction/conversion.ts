import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { fitLocalPolynomial, interpolate, lowerBound } from '../numeric/local-polynomial.ts';
import { fillTerms } from './baseline.ts';
import type { Bell, Excess } from './excess.ts';
import { TERMS } from './flank-sums.ts';
import { type Smoothed, smoothSignal, valueAt } from './smooth.ts';
import type { EventWindow } from './window.ts';

/**
 * Conversion and rate of an event, its first-order response undone: with φ = φ_m + τ_r dφ_m/dt the conversion is
 * α = (∫φ_m dt + τ_r φ_m)/area, which needs no derivative, and dα/dt = (φ_m + τ_r φ_m')/area.
 */
export interface EventShape {
  peakS: number;
  widthS: number;
  responseS: number;
  smoothed: Smoothed;
}

/** Half width of the local cubic that gives the signal and its slope, in full widths: its bias on a JMAK event is 3e-4 of the height. */
const SMOOTHING_HALF_WIDTH = 1 / 7;

export function shapeEvent(w: EventWindow, x: Excess, { peakS, leftS, rightS }: Bell, responseS: number): EventShape {
  const widthS = leftS + rightS;
  return { peakS, widthS, responseS, smoothed: smoothSignal(w.t, x.e, x.from, x.to, SMOOTHING_HALF_WIDTH * widthS) };
}

/** Signal freed of response and its slope at time t; `hint` is a bin near it. */
export function trueSignal(
  w: EventWindow,
  shape: EventShape,
  t: number,
  hint: number,
): { value: number; slope: number } {
  const f = valueAt(w, shape.smoothed, t, hint);
  const r = shape.responseS;
  return { value: f.value + r * f.slope, slope: f.slope + r * f.curvature };
}

/** α(t) on the bins of the window. */
export function conversionOfTime(w: EventWindow, x: Excess, shape: EventShape): Float64Array {
  const alpha = new Float64Array(w.t.length);
  const r = shape.responseS;
  for (let i = 0; i < alpha.length; i++) {
    const delayed = r > 0 && i >= x.from && i < x.to ? r * shape.smoothed.value[i] : 0;
    alpha[i] = (x.cumulative[i] + delayed) / x.area;
  }
  return alpha;
}

/** Bin at or just behind time t. */
export function binAt(w: EventWindow, x: Excess, t: number): number {
  return Math.min(x.to - 1, Math.max(x.from, lowerBound(w.t, t)));
}

/**
 * Time at which α first reaches each grid value, searched from the peak outwards so that noise in the tails cannot move it.
 * @returns s, 99 values
 */
export function timesOfGrid(w: EventWindow, x: Excess, alpha: Float64Array, peakS: number): Float64Array {
  const top = binAt(w, x, peakS);
  const out = new Float64Array(CONVERSION_GRID.length);
  const at = (i: number, a: number) => {
    const d = alpha[i + 1] - alpha[i];
    return w.t[i] + (d > 0 ? Math.min(1, Math.max(0, (a - alpha[i]) / d)) : 0.5) * (w.t[i + 1] - w.t[i]);
  };
  let i = Math.min(top, x.to - 2);
  for (let k = CONVERSION_GRID.length - 1; k >= 0; k--) {
    if (CONVERSION_GRID[k] > alpha[top]) continue;
    while (i > x.from && alpha[i] > CONVERSION_GRID[k]) i--;
    out[k] = at(i, CONVERSION_GRID[k]);
  }
  i = Math.min(top, x.to - 2);
  for (let k = 0; k < CONVERSION_GRID.length; k++) {
    if (CONVERSION_GRID[k] <= alpha[top]) continue;
    while (i < x.to - 2 && alpha[i + 1] < CONVERSION_GRID[k]) i++;
    out[k] = at(i, CONVERSION_GRID[k]);
  }
  // Strictly increasing times are a promise to everything that integrates over them.
  for (let k = 1; k < out.length; k++)
    if (!(out[k] > out[k - 1])) out[k] = out[k - 1] + 1e-9 * (w.t[w.t.length - 1] - w.t[0]);
  return out;
}

/**
 * One standard error of t(α), s, and of the area, from the baseline: the covariance of its coefficients (noise of the flanks, choice of
 * the model) carried through α = ∫e/area, and each limit moved by ± (10 % of the width + one bin) and the flanks fitted anew. All in
 * quadrature.
 * @param times of the conversion grid
 * @param refit the event with limits moved by seconds
 */
export function baselineError(
  w: EventWindow,
  x: Excess,
  shape: EventShape,
  times: Float64Array,
  refit: (leftShiftS: number, rightShiftS: number) => Excess,
): { error: Float64Array; areaError: number } {
  const plain = { ...shape, responseS: 0 };
  const step = 0.1 * shape.widthS + (w.t[1] - w.t[0]);
  const moved = (left: number, right: number) => {
    const m = refit(left, right);
    return { times: timesOfGrid(w, m, conversionOfTime(w, m, plain), shape.peakS), area: m.area };
  };
  const pairs = [
    [moved(step, 0), moved(-step, 0)],
    [moved(0, step), moved(0, -step)],
  ];
  // ∫ term dt on the grid: a coefficient's error δ moves α by δ (−I(t) + α I(end))/area, and t(α) by that over dα/dt.
  const c = x.baseline.covariance;
  const p = TERMS;
  const terms = new Float64Array(p);
  const before = new Float64Array(p);
  const integral = new Float64Array(p);
  const rows: Float64Array[] = [];
  let k = 0;
  for (let i = x.from; i < x.to; i++) {
    fillTerms(x.baseline, w.t[i], Math.min(1, Math.max(0, x.cumulative[i] / x.area)), terms);
    const share = x.share ? x.share[i] : 1;
    const dt = i > x.from ? w.t[i] - w.t[i - 1] : 0;
    for (let j = 0; j < p; j++) {
      const value = share * terms[j];
      integral[j] += 0.5 * dt * (value + before[j]);
      before[j] = value;
    }
    while (k < times.length && (w.t[i] >= times[k] || i === x.to - 1)) {
      rows.push(integral.slice());
      k++;
    }
  }
  const spread = (g: Float64Array) => {
    let sum = 0;
    for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) sum += g[i] * g[j] * c[i * p + j];
    return Math.sqrt(Math.max(0, sum));
  };
  const g = new Float64Array(p);
  const error = new Float64Array(times.length);
  for (let n = 0; n < times.length; n++) {
    for (let j = 0; j < p; j++) g[j] = rows[n][j] - CONVERSION_GRID[n] * integral[j];
    const signal = Math.max(
      trueSignal(w, shape, times[n], binAt(w, x, times[n])).value,
      0.02 * (x.area / shape.widthS),
    );
    const moves = pairs.map(([out, back]) => (out.times[n] - back.times[n]) / 2);
    error[n] = Math.hypot(spread(g) / signal, ...moves);
  }
  return { error, areaError: Math.hypot(spread(integral), ...pairs.map(([out, back]) => (out.area - back.area) / 2)) };
}

/** Temperature at time t from the bins around it, K. */
export function temperatureAt(w: EventWindow, t: number, halfS: number): number {
  if (t <= w.t[0] || t >= w.t[w.t.length - 1]) return interpolate(w.t, w.T, t);
  return fitLocalPolynomial(w.t, w.T, t, halfS, 2).value;
}
