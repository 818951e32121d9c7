import { type Baseline, baselineAt, fitBaseline } from './baseline.ts';
import type { EventWindow } from './window.ts';

/** An event with its baseline removed: bins [from, to) of the window, measured (not yet freed of the response). */
export interface Excess {
  baseline: Baseline;
  from: number;
  to: number;
  /** heat flow above the baseline, signal units, same length as the window (zero outside the limits) */
  e: Float64Array;
  /** ∫ e dt from the left limit, signal units × s */
  cumulative: Float64Array;
  area: number;
}

/** Rounds of α → baseline → α; each shrinks the change by about step ÷ height, so the last is far below noise. */
const ROUNDS = 8;

/** Subtracts the conversion-weighted baseline; α and baseline are iterated to a fixed point. */
export function subtractBaseline(w: EventWindow, baseline: Baseline): Excess {
  const n = w.t.length;
  let from = 0;
  while (from < n && w.t[from] < baseline.leftS) from++;
  let to = n;
  while (to > from && w.t[to - 1] > baseline.rightS) to--;
  const e = new Float64Array(n);
  const cumulative = new Float64Array(n);
  // First round: conversion as the share of time passed; the fixed point does not depend on it.
  for (let i = from; i < to; i++) cumulative[i] = (i - from) / Math.max(1, to - 1 - from);
  let area = 1;
  for (let round = 0; round < ROUNDS; round++) {
    for (let i = from; i < to; i++) {
      const alpha = Math.min(1, Math.max(0, cumulative[i] / area));
      e[i] = w.y[i] - baselineAt(baseline, w.t[i], alpha);
    }
    let sum = 0;
    cumulative[from] = 0;
    for (let i = from + 1; i < to; i++) {
      sum += 0.5 * (e[i] + e[i - 1]) * (w.t[i] - w.t[i - 1]);
      cumulative[i] = sum;
    }
    const change = Math.abs(sum - area) / Math.abs(sum || 1);
    area = sum;
    if (round > 0 && change < 1e-9) break;
    if (!(area > 0)) break;
  }
  for (let i = to; i < n; i++) cumulative[i] = area;
  return { baseline, from, to, e, cumulative, area };
}

/** Area above the straight line between the signal at both limits: the second opinion on the baseline. */
export function straightLineArea(w: EventWindow, x: Excess): number {
  const { baseline: b, from, to } = x;
  const y0 = baselineAt(b, b.leftS, 0);
  const slope = (baselineAt(b, b.rightS, 1) - y0) / (b.rightS - b.leftS);
  let sum = 0;
  for (let i = from + 1; i < to; i++) {
    const e1 = w.y[i] - y0 - slope * (w.t[i] - b.leftS);
    const e0 = w.y[i - 1] - y0 - slope * (w.t[i - 1] - b.leftS);
    sum += 0.5 * (e0 + e1) * (w.t[i] - w.t[i - 1]);
  }
  return sum;
}

/**
 * Half widths at half maximum to the left and right of the highest point, s.
 * @returns undefined when the signal does not fall to half on both sides within the limits
 */
export function halfWidths(
  w: EventWindow,
  x: Excess,
): { peakS: number; height: number; leftS: number; rightS: number } | undefined {
  let top = x.from;
  // Three-bin mean: a single noisy bin must not be the top.
  const smooth = (i: number) => (x.e[Math.max(x.from, i - 1)] + x.e[i] + x.e[Math.min(x.to - 1, i + 1)]) / 3;
  for (let i = x.from; i < x.to; i++) if (smooth(i) > smooth(top)) top = i;
  const height = smooth(top);
  const half = height / 2;
  let l = top;
  while (l > x.from && smooth(l) > half) l--;
  let r = top;
  while (r < x.to - 1 && smooth(r) > half) r++;
  if (smooth(l) > half || smooth(r) > half) return undefined;
  const cross = (a: number, b: number) => {
    const [ya, yb] = [smooth(a), smooth(b)];
    return w.t[a] + ((half - ya) / (yb - ya)) * (w.t[b] - w.t[a]);
  };
  return { peakS: w.t[top], height, leftS: w.t[top] - cross(l, l + 1), rightS: cross(r, r - 1) - w.t[top] };
}

/**
 * Limits in half widths from the peak. A JMAK event in reduced temperature u = n E (T − Tp)/(R Tp²) is close to exp(u + 1 − e^u)
 * whatever n and E: half height at u = −1.46 and +0.98; at seven and four and a half half widths 1e-4 and 1e-33 of the height are left.
 */
const LEFT_HALF_WIDTHS = 7;
const RIGHT_HALF_WIDTHS = 4.5;
/** A tail that still stands this much above the baseline (part of the height, and in errors) moves its limit out by one half width. */
const TAIL_HEIGHT_PART = 0.003;
const TAIL_SIGMAS = 4;

/**
 * Finds the limits of an event and its baseline together, starting from rough half widths.
 * @returns the event without baseline, or which side is cut off
 */
export function isolateEvent(
  w: EventWindow,
  start: { peakS: number; leftS: number; rightS: number; height: number },
): { excess: Excess; height: number } | { cut: 'before' | 'behind' } {
  const n = w.t.length;
  let { peakS, leftS, rightS, height } = start;
  let leftReach = LEFT_HALF_WIDTHS;
  let rightReach = RIGHT_HALF_WIDTHS;
  let excess: Excess | undefined;
  for (let round = 0; round < 6; round++) {
    const width = leftS + rightS;
    // Leave at least 0.3 widths of flank inside the window where the event allows it.
    const leftLimit = Math.max(peakS - leftReach * leftS, Math.min(w.t[0] + 0.3 * width, peakS - 3 * leftS));
    const rightLimit = Math.min(peakS + rightReach * rightS, Math.max(w.t[n - 1] - 0.3 * width, peakS + 2.2 * rightS));
    if (leftLimit <= w.t[3]) return { cut: 'before' };
    if (rightLimit >= w.t[n - 4]) return { cut: 'behind' };
    const baseline = fitBaseline(w, peakS, width, leftLimit, rightLimit, height);
    if (!baseline) return { cut: peakS - w.t[0] < w.t[n - 1] - peakS ? 'before' : 'behind' };
    excess = subtractBaseline(w, baseline);
    const shape = halfWidths(w, excess);
    if (!shape) return { cut: peakS - w.t[0] < w.t[n - 1] - peakS ? 'before' : 'behind' };
    const settled =
      Math.abs(shape.leftS - leftS) < 0.02 * width &&
      Math.abs(shape.rightS - rightS) < 0.02 * width &&
      Math.abs(shape.peakS - peakS) < 0.05 * width;
    ({ peakS, leftS, rightS, height } = shape);
    const before = tailStands(w, excess, leftLimit, leftLimit + 0.7 * leftS, height);
    const behind = tailStands(w, excess, rightLimit - 0.7 * rightS, rightLimit, height);
    if (settled && !before && !behind) break;
    if (settled) {
      if (before) leftReach += 1;
      if (behind) rightReach += 1;
    }
  }
  return excess ? { excess, height } : { cut: 'behind' };
}

function tailStands(w: EventWindow, x: Excess, fromS: number, toS: number, height: number): boolean {
  let sum = 0;
  let count = 0;
  for (let i = x.from; i < x.to; i++) {
    if (w.t[i] < fromS || w.t[i] > toS) continue;
    sum += x.e[i];
    count++;
  }
  if (count < 3) return false;
  return sum / count > TAIL_HEIGHT_PART * height + (TAIL_SIGMAS * w.noise) / Math.sqrt(count);
}
