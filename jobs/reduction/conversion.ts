import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { fitLocalPolynomial, interpolate } from '../numeric/local-polynomial.ts';
import { fitBaseline } from './baseline.ts';
import { type Excess, subtractBaseline } from './excess.ts';
import type { EventWindow } from './window.ts';

/**
 * Conversion and rate of an event, its first-order response undone: with φ = φ_m + τ_r dφ_m/dt the conversion is
 * α = (∫φ_m dt + τ_r φ_m)/area, which needs no derivative, and dα/dt = (φ_m + τ_r φ_m')/area (METHODS 4.7).
 */
export interface EventShape {
  peakS: number;
  widthS: number;
  responseS: number;
}

/** Half width of the local cubic that gives the signal and its slope, in full widths: its bias on a JMAK event is 3e-4 of the height. */
const SMOOTHING_HALF_WIDTH = 1 / 7;

/** Signal freed of response, its slope, and the noise factors at time t. */
export function trueSignal(
  w: EventWindow,
  x: Excess,
  shape: EventShape,
  t: number,
): { value: number; slope: number; valueNoise: number } {
  const f = fitLocalPolynomial(w.t, x.e, t, SMOOTHING_HALF_WIDTH * shape.widthS, 3);
  const r = shape.responseS;
  return {
    value: f.value + r * f.slope,
    slope: f.slope + r * f.curvature,
    valueNoise: Math.hypot(f.valueNoise, r > 0 ? r * f.slopeNoise : 0),
  };
}

/** α(t) on the bins of the window. */
export function conversionOfTime(w: EventWindow, x: Excess, shape: EventShape): Float64Array {
  const alpha = new Float64Array(w.t.length);
  const r = shape.responseS;
  for (let i = 0; i < alpha.length; i++) {
    let a = x.cumulative[i];
    if (r > 0 && i >= x.from && i < x.to) {
      a += r * fitLocalPolynomial(w.t, x.e, w.t[i], (SMOOTHING_HALF_WIDTH / 2) * shape.widthS, 2, i).value;
    }
    alpha[i] = a / x.area;
  }
  return alpha;
}

/**
 * Time at which α first reaches each grid value, searched from the peak outwards so that noise in the tails cannot move it.
 * @returns s, 99 values
 */
export function timesOfGrid(w: EventWindow, x: Excess, alpha: Float64Array, peakS: number): Float64Array {
  let top = x.from;
  while (top < x.to - 1 && w.t[top] < peakS) top++;
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
 * One standard error of T(α) from the choice of limits, K: each limit moved by ± (10 % of the width + one bin), shifts of both
 * sides added in quadrature.
 * @param betaKPerS heating rate
 */
export function baselineError(
  w: EventWindow,
  x: Excess,
  shape: EventShape,
  height: number,
  betaKPerS: number,
): { error: Float64Array; areaError: number } {
  const step = 0.1 * shape.widthS + (w.t[1] - w.t[0]);
  const b = x.baseline;
  const moved = (left: number, right: number) => {
    const fitted = fitBaseline(w, b.peakS, b.widthS, b.leftS + left, b.rightS + right, height) ?? b;
    const m = subtractBaseline(w, fitted);
    return { times: timesOfGrid(w, m, conversionOfTime(w, m, { ...shape, responseS: 0 }), shape.peakS), area: m.area };
  };
  const sides = [
    [moved(step, 0), moved(-step, 0)],
    [moved(0, step), moved(0, -step)],
  ];
  const error = new Float64Array(CONVERSION_GRID.length);
  for (let k = 0; k < error.length; k++) {
    error[k] = (betaKPerS * Math.hypot(...sides.map(([p, m]) => p.times[k] - m.times[k]))) / 2;
  }
  return { error, areaError: Math.hypot(...sides.map(([p, m]) => p.area - m.area)) / 2 };
}

/** Temperature at time t from the bins around it, K. */
export function temperatureAt(w: EventWindow, t: number, halfS: number): number {
  if (t <= w.t[0] || t >= w.t[w.t.length - 1]) return interpolate(w.t, w.T, t);
  return fitLocalPolynomial(w.t, w.T, t, halfS, 2).value;
}
