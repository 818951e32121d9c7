import { median } from '../numeric/statistics.ts';

/** An upward excursion of the signal: rows of the coarse trace it was found on, times in s. */
export interface Excursion {
  peakS: number;
  /** Height above the higher of its two bases (topological prominence), signal units */
  prominence: number;
  /** Half widths at half prominence, s */
  leftS: number;
  rightS: number;
  /** Full width at half prominence as it is, s */
  spanS: number;
}

/** Bins of the coarse trace on which events are looked for. */
const COARSE = 1200;
/** An excursion must stand this many noise sigmas of the coarse trace above its bases … */
const LEAST_SIGMAS = 8;
/** … and be narrower than this part of the segment: wider is baseline. */
const WIDEST_PART = 0.4;
/** Half widths of one event differ by no more than this factor. */
const MOST_LOPSIDED = 3;

/**
 * Exothermic excursions, most prominent first.
 * @param t s, increasing   @param y heat flow, exotherm up, any unit   rows [from, to) are looked at
 */
export function findExcursions(t: Float64Array, y: Float64Array, from: number, to: number): Excursion[] {
  const { bt, by } = coarse(t, y, from, to);
  const n = by.length;
  if (n < 12) return [];
  const noise = noiseSigma(by);
  const span = bt[n - 1] - bt[0];
  const found: Excursion[] = [];
  for (let i = 1; i < n - 1; i++) {
    if (!(by[i] > by[i - 1] && by[i] >= by[i + 1])) continue;
    let low = by[i];
    let l = i;
    while (l > 0 && by[l - 1] <= by[i]) if (by[--l] < low) low = by[l];
    let lowRight = by[i];
    let r = i;
    while (r < n - 1 && by[r + 1] <= by[i]) if (by[++r] < lowRight) lowRight = by[r];
    const prominence = by[i] - Math.max(low, lowRight);
    if (!(prominence > LEAST_SIGMAS * noise)) continue;
    const half = by[i] - prominence / 2;
    let hl = i;
    while (hl > l && by[hl] > half) hl--;
    let hr = i;
    while (hr < r && by[hr] > half) hr++;
    // On a slope or beside a step one side finds half height far away: the other then tells the width.
    const [toLeft, toRight] = [bt[i] - bt[hl], bt[hr] - bt[i]];
    const leftS = Math.min(toLeft, MOST_LOPSIDED * toRight);
    const rightS = Math.min(toRight, MOST_LOPSIDED * toLeft);
    if (hr - hl < 3 || leftS + rightS > WIDEST_PART * span) continue;
    found.push({ peakS: bt[i], prominence, leftS, rightS, spanS: toLeft + toRight });
  }
  return found.sort((a, b) => b.prominence - a.prominence);
}

function coarse(t: Float64Array, y: Float64Array, from: number, to: number): { bt: Float64Array; by: Float64Array } {
  const size = Math.max(1, Math.ceil((to - from) / COARSE));
  const n = Math.floor((to - from) / size);
  const bt = new Float64Array(n);
  const by = new Float64Array(n);
  for (let b = 0; b < n; b++) {
    let st = 0;
    let sy = 0;
    for (let i = from + b * size; i < from + (b + 1) * size; i++) {
      st += t[i];
      sy += y[i];
    }
    bt[b] = st / size;
    by[b] = sy / size;
  }
  return { bt, by };
}

const MOST_DIFFERENCES = 1000;

/**
 * Noise of one point from second differences (which a smooth curve hardly enters): 1.4826 × median |d²| ÷ √6, exact for white noise.
 */
export function noiseSigma(y: Float64Array, from = 0, to = y.length): number {
  const n = to - from - 2;
  if (n < 3) return 0;
  // A thousand differences tell the noise to 4 %; a longer file is sampled evenly.
  const step = Math.max(1, Math.floor(n / MOST_DIFFERENCES));
  const d = new Float64Array(Math.floor((n - 1) / step) + 1);
  for (let k = 0; k < d.length; k++) {
    const i = from + 1 + k * step;
    d[k] = Math.abs(y[i - 1] - 2 * y[i] + y[i + 1]);
  }
  return (1.4826 * median(d)) / Math.sqrt(6);
}
