import { fitLocalPolynomial } from '../numeric/local-polynomial.ts';
import type { EventShape } from './conversion.ts';
import { trueSignal } from './conversion.ts';
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

/** Half width of the cubic through the top, full widths: wide enough to average noise, its bias is 2e-3 of the width. */
const TOP_HALF_WIDTH = 1 / 5;
const PROBES = 60;

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
    peakErrorS = (w.noise * f.slopeNoise) / Math.abs(bend);
    if (Math.abs(step) < 1e-7 * shape.widthS) break;
  }
  const leftS = w.t[x.from];
  const rightS = w.t[x.to - 1];
  const height = trueSignal(w, x, shape, peakS).value;
  const rising = steepest(w, x, shape, leftS, peakS, 1);
  const falling = steepest(w, x, shape, peakS, rightS, -1);
  const { left, right } = halfHeightTimes(w, x, shape, peakS, leftS, rightS, height / 2);
  let first = 0;
  for (let i = x.from + 1; i < x.to; i++) {
    const dt = w.t[i] - w.t[i - 1];
    first += 0.5 * dt * ((w.t[i] - peakS) * x.e[i] + (w.t[i - 1] - peakS) * x.e[i - 1]);
  }
  return {
    onsetS: rising.t - rising.value / rising.slope,
    endS: falling.t - falling.value / falling.slope,
    peakS,
    widthS: right - left,
    // A first-order response delays the centroid by exactly τ_r.
    centroidS: peakS + first / x.area - r,
    peakErrorS,
    height,
  };
}

function steepest(w: EventWindow, x: Excess, shape: EventShape, fromS: number, toS: number, sign: 1 | -1) {
  let best = { t: fromS, value: 0, slope: 0 };
  // Within two and a half widths of the peak: further out only noise could be steeper.
  const from = Math.max(fromS, toS - 2.5 * shape.widthS * (sign > 0 ? 1 : 1e9));
  const to = sign > 0 ? toS : Math.min(toS, fromS + 2.5 * shape.widthS);
  for (let k = 0; k <= PROBES; k++) {
    const t = from + ((to - from) * k) / PROBES;
    const s = trueSignal(w, x, shape, t);
    if (sign * s.slope > sign * best.slope) best = { t, value: s.value, slope: s.slope };
  }
  return best.slope === 0 ? { t: sign > 0 ? fromS : toS, value: 0, slope: 1 } : best;
}

function halfHeightTimes(
  w: EventWindow,
  x: Excess,
  shape: EventShape,
  peakS: number,
  leftS: number,
  rightS: number,
  half: number,
): { left: number; right: number } {
  const f = (t: number) => trueSignal(w, x, shape, t).value - half;
  const search = (direction: -1 | 1, limit: number) => {
    const step = shape.widthS / 24;
    let inside = peakS;
    while (direction * (limit - inside) > 0) {
      let outside = inside + direction * step;
      if (f(outside) <= 0) {
        for (let k = 0; k < 30; k++) {
          const mid = (inside + outside) / 2;
          if (f(mid) > 0) inside = mid;
          else outside = mid;
        }
        return (inside + outside) / 2;
      }
      inside = outside;
    }
    return limit;
  };
  return { left: search(-1, leftS), right: search(1, rightS) };
}
