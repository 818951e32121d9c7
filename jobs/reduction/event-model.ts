import type { EventWindow } from './window.ts';

/**
 * A family of event shapes around the JMAK law. Along X(t), in which ln of the extended volume is straight, an event is
 *   φ = A b X'(t) r(v),   v = b (X − x),   r(v) = e^v (1 + m e^v)^(−1/m − 1),
 * A its area, x its peak, b its steepness. m = 0 is JMAK itself, r = exp(v − e^v); m > 0 has a longer tail (m = 1 is symmetric in v),
 * m < 0 a shorter one (Richards 1959, J. Exp. Bot. 10:290, with v linear in time).
 * On a ramp ln ∫K dt = (x₀ + 2) θ − (x₀ + 1) θ² + …, θ = (T − Tp)/Tp, x₀ = E/(R Tp): X = θ/(1 + θ) has that curvature to 1/x₀, whatever E
 * and n. On a hold ln (K t)ⁿ = n ln t + …: X = ln(t − start).
 */
export interface EventClock {
  X: Float64Array;
  /** dX/dt, 1/s */
  slope: Float64Array;
}

export interface EventParameters {
  /** signal units × s */
  area: number;
  /** in X */
  peak: number;
  steepness: number;
  /** m */
  tail: number;
}

/** Full width at half maximum in v, and r(0), of the JMAK shape. */
export const WIDTH_IN_V = 2.4462;
export const TOP_OF_JMAK = Math.exp(-1);

/** @param startS of the hold, missing on a ramp   @param atS where X is 0 (a hold: 0 up to a constant), near the event */
export function eventClock(w: EventWindow, atS: number, startS: number | undefined): EventClock {
  const n = w.t.length;
  const X = new Float64Array(n);
  const slope = new Float64Array(n);
  if (startS !== undefined) {
    const bin = (w.t[n - 1] - w.t[0]) / (n - 1);
    for (let i = 0; i < n; i++) {
      const s = Math.max(w.t[i] - startS, bin / 2);
      X[i] = Math.log(s);
      slope[i] = 1 / s;
    }
    return { X, slope };
  }
  const rate = (w.T[n - 1] - w.T[0]) / (w.t[n - 1] - w.t[0]);
  // Crystallisation on cooling has no such law: its clock stays straight.
  const atK = w.T[0] + rate * (atS - w.t[0]);
  const curved = rate > 0 ? 1 : 0;
  for (let i = 0; i < n; i++) {
    const theta = (Math.abs(rate) * (w.t[i] - atS)) / atK;
    X[i] = theta / (1 + curved * theta);
    slope[i] = Math.abs(rate) / atK / (1 + curved * theta) ** 2;
  }
  return { X, slope };
}

/** Bounds of m, kept by fitting the arc tangent; m = 0 at JMAK_TURN. */
const TAIL = { middle: 0.6, reach: 1.2 };
export const JMAK_TURN = Math.tan((-TAIL.middle / TAIL.reach) * (Math.PI / 2));
export const tailOfTurn = (turn: number): number => TAIL.middle + TAIL.reach * (2 / Math.PI) * Math.atan(turn);
export const tailByTurn = (turn: number): number => ((TAIL.reach / (1 + turn * turn)) * 2) / Math.PI;

/** Below this |m| the logarithm is expanded. */
const SMALL_TAIL = 1e-3;

/** r(v), d ln r/dv, d ln r/dm; conversion 1 − (1 + m e^v)^(−1/m), whose derivative in v is r, and its derivative in m. */
export const shapeAt = { value: 0, byV: 0, byTail: 0, conversion: 0, conversionByTail: 0 };
export function fillShape(v: number, m: number): void {
  const e = Math.exp(Math.min(v, 50));
  const z = 1 + m * e;
  if (!(z > 1e-9) || v > 50) {
    shapeAt.value = 0;
    shapeAt.byV = 0;
    shapeAt.byTail = 0;
    shapeAt.conversion = 1;
    shapeAt.conversionByTail = 0;
    return;
  }
  let left: number;
  if (Math.abs(m) < SMALL_TAIL) {
    const second = e - (e * e) / 2;
    const third = (e * e * e) / 3 - (e * e) / 2;
    shapeAt.value = Math.exp(v - e - m * (second + m * third));
    shapeAt.byTail = -second - 2 * m * third;
    left = Math.exp(-e * (1 - (m * e) / 2));
    shapeAt.conversionByTail = (-left * e * e) / 2;
  } else {
    const l = Math.log(z);
    shapeAt.value = Math.exp(v - (1 / m + 1) * l);
    shapeAt.byTail = l / (m * m) - ((1 / m + 1) * e) / z;
    left = Math.exp(-l / m);
    shapeAt.conversionByTail = -left * (l / (m * m) - e / (m * z));
  }
  shapeAt.byV = 1 - ((1 + m) * e) / z;
  shapeAt.conversion = 1 - left;
}

/** φ on every bin of the window, signal units. */
export function eventValues({ X, slope }: EventClock, p: EventParameters): Float64Array {
  const out = new Float64Array(X.length);
  for (let i = 0; i < out.length; i++) {
    fillShape(p.steepness * (X[i] - p.peak), p.tail);
    out[i] = p.area * p.steepness * slope[i] * shapeAt.value;
  }
  return out;
}
