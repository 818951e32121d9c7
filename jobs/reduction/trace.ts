import type { ReducedTrace } from '../../schema/wire/reduced.ts';
import { baselineAt } from './baseline.ts';
import type { Excess } from './excess.ts';
import type { EventWindow } from './window.ts';

/** Points of a stored trace: a plot shows no more, extremes are kept. */
const MOST_POINTS = 2000;

/**
 * Thinned thermogram of rows [from, to): the lowest and the highest row of each block, so that no peak or spike is lost. The baseline is
 * NaN outside the event. The time of a hold is kept too.
 * @param y heat flow, exotherm up   @param shiftK added to the measured temperature
 */
export function makeTrace(
  t: Float64Array,
  T: Float64Array,
  y: Float64Array,
  from: number,
  to: number,
  shiftK: number,
  shown: { window: EventWindow; excess: Excess }[] = [],
  isHold = false,
): ReducedTrace {
  const n = to - from;
  const blocks = Math.min(n, MOST_POINTS / 2);
  const rows: number[] = [];
  if (n <= MOST_POINTS) for (let i = from; i < to; i++) rows.push(i);
  else {
    for (let b = 0; b < blocks; b++) {
      const start = from + Math.floor((b * n) / blocks);
      const end = from + Math.floor(((b + 1) * n) / blocks);
      let low = start;
      let high = start;
      for (let i = start; i < end; i++) {
        if (y[i] < y[low]) low = i;
        if (y[i] > y[high]) high = i;
      }
      if (low === high) rows.push(low);
      else rows.push(Math.min(low, high), Math.max(low, high));
    }
  }
  const trace: ReducedTrace = {
    temperatureK: new Float64Array(rows.length),
    heatFlow: new Float64Array(rows.length),
    baseline: new Float64Array(rows.length).fill(Number.NaN),
  };
  rows.forEach((i, k) => {
    trace.temperatureK[k] = T[i] + shiftK;
    trace.heatFlow[k] = y[i];
  });
  if (isHold) trace.timeS = Float64Array.from(rows, (i) => t[i] - t[from]);
  for (const { window: w, excess: x } of shown) {
    const { leftS, rightS } = x.baseline;
    let bin = 0;
    rows.forEach((i, k) => {
      if (t[i] < leftS || t[i] > rightS) return;
      while (bin < w.t.length - 1 && w.t[bin] < t[i]) bin++;
      trace.baseline[k] = baselineAt(x.baseline, t[i], Math.min(1, Math.max(0, x.cumulative[bin] / x.area)));
    });
  }
  return trace;
}

/** Highest less lowest value of rows [from, to). */
export function rangeOf(y: Float64Array, from = 0, to = y.length): number {
  let [low, high] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (let i = from; i < to; i++) {
    if (y[i] < low) low = y[i];
    if (y[i] > high) high = y[i];
  }
  return high - low;
}
