import { fitLocalPolynomial } from '../numeric/local-polynomial.ts';
import { binAt, type EventShape, trueSignal } from './conversion.ts';
import type { Excess } from './excess.ts';
import type { EventWindow } from './window.ts';

/** Times of an event's landmarks, s, from the signal freed of its response. */
export interface Landmarks {
  onsetS: number;
  peakS: number;
  endS: number;
  widthS: number;
  centroidS: number;
  /** one standard error of the peak from noise, s */
  peakErrorS: number;
  height: number;
}

/** Slope at the top of noise that does not average out, in units of it a half width of the cubic (study `reduction`, pink noise). */
const FLICKER_SLOPE = 2;
/** Half width of the cubic through the top, full widths: wide enough to average noise, its bias is 2e-3 of the width. */
const TOP_HALF_WIDTH = 1 / 5;

/**
 * Onset and end are where the tangents at the steepest points of the flanks meet the baseline (ISO 11357-1), the peak is the top of a
 * local cubic, the centroid ∫ t φ dt/∫ φ dt.
 */
export function findLandmarks(w: EventWindow, x: Excess, shape: EventShape): Landmarks {
  const r = shape.responseS;
  const half = TOP_HALF_WIDTH * shape.widthS;
  let peakS = shape.peakS;
  let peakErrorS = 0;
  for (let round = 0; round < 12; round++) {
    const f = fitLocalPolynomial(w.t, x.e, peakS, half, 3);
    // d/dt (φ_m + τ_r φ_m') = 0 along the cubic: one Newton step, kept inside the window.
    const slope = f.slope + r * f.curvature;
    const bend = f.curvature + r * f.third;
    if (!(bend < 0)) break;
    const step = Math.max(-half, Math.min(half, -slope / bend));
    peakS += step;
    const white = w.noise * Math.hypot(f.slopeNoise, (r + w.undoneS) * f.curvatureNoise);
    peakErrorS = Math.hypot(white, (FLICKER_SLOPE * w.flicker) / half) / Math.abs(bend);
    if (Math.abs(step) < 1e-7 * shape.widthS) break;
  }
  const top = binAt(w, x, peakS);
  const height = trueSignal(w, shape, peakS, top).value;
  const rising = steepest(w, x, shape, top, -1);
  const falling = steepest(w, x, shape, top, 1);
  let first = 0;
  for (let i = x.from + 1; i < x.to; i++) {
    const dt = w.t[i] - w.t[i - 1];
    first += 0.5 * dt * ((w.t[i] - peakS) * x.e[i] + (w.t[i - 1] - peakS) * x.e[i - 1]);
  }
  // What lies before the left limit falls off within a third of a width; what a melting hides sits about as far behind the right one.
  const beside = shape.widthS / 3;
  first += x.cumulative[x.from] * (w.t[x.from] - beside - peakS);
  first += (x.area - x.cumulative[x.to - 1]) * (w.t[x.to - 1] + beside - peakS);
  return {
    onsetS: rising.t - rising.value / rising.slope,
    endS: falling.t - falling.value / falling.slope,
    peakS,
    widthS: crossing(w, x, shape, top, height / 2, 1) - crossing(w, x, shape, top, height / 2, -1),
    // A first-order response delays the centroid by exactly τ_r.
    centroidS: peakS + first / x.area - r,
    peakErrorS,
    height,
  };
}

/** Steepest bin on one side of the top, within two and a half widths: further out only noise could be steeper. */
function steepest(w: EventWindow, x: Excess, shape: EventShape, top: number, direction: -1 | 1) {
  let best = { t: w.t[top], value: 0, slope: 0 };
  for (let i = top; i >= x.from && i < x.to; i += direction) {
    if (Math.abs(w.t[i] - w.t[top]) > 2.5 * shape.widthS) break;
    const s = trueSignal(w, shape, w.t[i], i);
    if (direction * s.slope < direction * best.slope) best = { t: w.t[i], value: s.value, slope: s.slope };
  }
  return best.slope === 0 ? { t: w.t[direction < 0 ? x.from : x.to - 1], value: 0, slope: 1 } : best;
}

/** Time at which the signal falls through `level` on one side of the top. */
function crossing(w: EventWindow, x: Excess, shape: EventShape, top: number, level: number, direction: -1 | 1): number {
  let inside = trueSignal(w, shape, w.t[top], top).value;
  for (let i = top + direction; i >= x.from && i < x.to; i += direction) {
    const { value } = trueSignal(w, shape, w.t[i], i);
    if (value <= level) {
      const before = w.t[i - direction];
      return before + ((inside - level) / (inside - value)) * (w.t[i] - before);
    }
    inside = value;
  }
  return w.t[direction < 0 ? x.from : x.to - 1];
}
