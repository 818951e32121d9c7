import { lowerBound } from '../numeric/local-polynomial.ts';
import { type Baseline, baselineAt, conversionStep } from './baseline.ts';
import type { EventWindow } from './window.ts';

/** An event with its baseline removed: bins [from, to) of the window, measured (not yet freed of the response). */
export interface Excess {
  baseline: Baseline;
  from: number;
  to: number;
  /** heat flow above the baseline, signal units, same length as the window (zero outside the limits) */
  e: Float64Array;
  /** ∫ e dt from the start of the event, signal units × s; at the left limit it holds the foot before it */
  cumulative: Float64Array;
  area: number;
  /** of the whole excess that belongs to this event, a bin; missing where it stands alone */
  share?: Float64Array;
  /** Part of the area that the separation from its neighbours leaves open */
  openPart?: number;
}

/** Rounds of α → baseline → α; each shrinks the change by about step ÷ height, so the last is far below noise. */
const ROUNDS = 12;
/** … and it has settled when the area changes by less than this part. */
const SETTLED = 1e-7;

/**
 * Subtracts the conversion-weighted baseline; α and baseline are iterated to a fixed point.
 * @param foot area of the event before the left limit, signal units × s
 * @param total whole area where it is known from elsewhere (the end of the event is hidden), else what is measured
 * @param start the event with a baseline near this one: α is iterated from there
 */
export function subtractBaseline(
  w: EventWindow,
  baseline: Baseline,
  foot: number,
  total?: number,
  start?: Excess,
): Excess {
  const n = w.t.length;
  const from = lowerBound(w.t, baseline.leftS);
  const to = Math.max(from, lowerBound(w.t, baseline.rightS));
  const e = new Float64Array(n);
  const cumulative = new Float64Array(n);
  const { level: step, slope } = conversionStep(baseline);
  const stepped = step !== 0 || slope !== 0;
  // The baseline of the left side once, then only the step under the event changes from round to round.
  for (let i = from; i < to; i++) e[i] = w.y[i] - baselineAt(baseline, w.t[i], 0);
  const above = stepped ? e.slice(from, to) : e;
  if (stepped) {
    // First round: conversion of a near baseline, else the share of time passed; the fixed point does not depend on it.
    if (start) for (let i = from; i < to; i++) cumulative[i] = start.cumulative[i] / start.area;
    else for (let i = from; i < to; i++) cumulative[i] = (i - from) / Math.max(1, to - 1 - from);
  }
  const { t } = w;
  let area = stepped && start ? start.area : 1;
  let scale = 1;
  for (let round = 0; round < (stepped ? ROUNDS : 1); round++) {
    let sum = foot;
    let before = 0;
    for (let i = from; i < to; i++) {
      let value = above[i - (stepped ? from : 0)];
      if (stepped) {
        const alpha = Math.min(1, Math.max(0, cumulative[i] * scale));
        value -= alpha * (step + slope * (t[i] - baseline.peakS));
        e[i] = value;
      }
      if (i > from) sum += 0.5 * (value + before) * (t[i] - t[i - 1]);
      cumulative[i] = sum;
      before = value;
    }
    const change = Math.abs(sum - area) / Math.abs(sum || 1);
    area = sum;
    if (!(area > 0) || (round > 0 && change < SETTLED)) break;
    if (total !== undefined) area = total;
    scale = 1 / area;
  }
  if (total !== undefined) area = total;
  for (let i = to; i < n; i++) cumulative[i] = area;
  return { baseline, from, to, e, cumulative, area };
}

/** Area above the straight line between the signal at both limits: the second opinion on the baseline. */
export function straightLineArea(w: EventWindow, x: Excess): number {
  const { baseline: b, from, to } = x;
  const y0 = baselineAt(b, b.leftS, 0);
  const slope = (baselineAt(b, b.rightS, 1) - y0) / (b.rightS - b.leftS);
  let sum = x.cumulative[from];
  for (let i = from + 1; i < to; i++) {
    const e1 = w.y[i] - y0 - slope * (w.t[i] - b.leftS);
    const e0 = w.y[i - 1] - y0 - slope * (w.t[i - 1] - b.leftS);
    sum += 0.5 * (e0 + e1) * (w.t[i] - w.t[i - 1]);
  }
  return sum;
}

/** Top and half widths of an event on the time axis, s. */
export interface Bell {
  peakS: number;
  height: number;
  leftS: number;
  rightS: number;
}

/**
 * Half widths at half maximum to the left and right of the highest point.
 * @param width rough full width, s: the signal is averaged over a twelfth of it, so that no noisy bin is the top
 * @returns undefined when the signal does not fall to half on both sides within the limits
 */
export function halfWidths(w: EventWindow, x: Excess, width: number): Bell | undefined {
  const n = x.to - x.from;
  if (n < 3) return undefined;
  const k = Math.max(1, Math.round((width / 24) * ((n - 1) / (w.t[x.to - 1] - w.t[x.from]))));
  const sum = new Float64Array(n + 1);
  for (let i = 0; i < n; i++) sum[i + 1] = sum[i] + x.e[x.from + i];
  const smooth = (i: number) => {
    const a = Math.max(0, i - k);
    const c = Math.min(n, i + k + 1);
    return (sum[c] - sum[a]) / (c - a);
  };
  let top = 0;
  for (let i = 0; i < n; i++) if (smooth(i) > smooth(top)) top = i;
  const height = smooth(top);
  const half = height / 2;
  let l = top;
  while (l > 0 && smooth(l) > half) l--;
  let r = top;
  while (r < n - 1 && smooth(r) > half) r++;
  if (smooth(l) > half || smooth(r) > half) return undefined;
  const cross = (a: number, b: number) => {
    const [ya, yb] = [smooth(a), smooth(b)];
    return w.t[x.from + a] + ((half - ya) / (yb - ya)) * (w.t[x.from + b] - w.t[x.from + a]);
  };
  const peakS = w.t[x.from + top];
  return { peakS, height, leftS: peakS - cross(l, l + 1), rightS: cross(r, r - 1) - peakS };
}
