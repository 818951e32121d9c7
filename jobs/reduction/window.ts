import { median } from '../numeric/statistics.ts';

/** The part of a scan around one event, averaged into bins: everything finer than a bin is noise for every later use. */
export interface EventWindow {
  /** s */
  t: Float64Array;
  /** K, as measured */
  T: Float64Array;
  /** heat flow, exotherm up */
  y: Float64Array;
  /** noise of one bin, one standard deviation, signal units */
  noise: number;
  /** … and what of the noise does not average out over parts of the event's width, one standard deviation: 0 where it is white */
  flicker: number;
  /** file rows a bin */
  binSize: number;
  /** First-order response that y has been freed of already, s */
  undoneS: number;
}

/** Blocks, parts of the width, whose means are compared, and the fewest of them that tell anything. */
const BLOCKS = [1 / 6, 1 / 4, 1 / 3];
const FEWEST_BLOCKS = 8;

/** Bins over the full width at half maximum: the averaging error is then about 2e-5 of the height. */
const BINS_OVER_WIDTH = 80;

/**
 * @param rows [from, to) of the columns to take   @param widthS full width at half maximum, s
 * @param rowNoise noise of one row
 */
export function averageWindow(
  t: Float64Array,
  T: Float64Array,
  y: Float64Array,
  from: number,
  to: number,
  widthS: number,
  rowNoise: number,
): EventWindow {
  const perWidth = ((to - from) * widthS) / (t[to - 1] - t[from]);
  const size = Math.max(1, Math.floor(perWidth / BINS_OVER_WIDTH));
  const n = Math.floor((to - from) / size);
  const out = { t: new Float64Array(n), T: new Float64Array(n), y: new Float64Array(n) };
  for (let b = 0; b < n; b++) {
    let st = 0;
    let sT = 0;
    let sy = 0;
    for (let i = from + b * size; i < from + (b + 1) * size; i++) {
      st += t[i];
      sT += T[i];
      sy += y[i];
    }
    out.t[b] = st / size;
    out.T[b] = sT / size;
    out.y[b] = sy / size;
  }
  return { noise: rowNoise / Math.sqrt(size), flicker: 0, binSize: size, undoneS: 0, ...out };
}

/**
 * Noise that does not average out: means of blocks scatter by more than white noise lets them. Second differences of neighbouring means leave
 * drift out (Allan 1966, Proc. IEEE 54:221, with one difference more); of noise with a 1/f spectrum they are the same for any length.
 * @param fromS end of what lies before the event, start of what lies behind it: blocks between them are not looked at
 */
export function flickerOf(w: EventWindow, widthS: number, fromS: number, toS: number): number {
  const perWidth = widthS / ((w.t[w.t.length - 1] - w.t[0]) / (w.t.length - 1));
  const sizes: number[] = [];
  let sum = 0;
  for (const part of BLOCKS) {
    const size = Math.round(part * perWidth);
    if (size < 2 || sizes.includes(size)) continue;
    const differences: number[] = [];
    const mean = (at: number) => {
      let total = 0;
      for (let i = at; i < at + size; i++) total += w.y[i];
      return total / size;
    };
    for (let at = 0; at + 3 * size <= w.t.length; at += size) {
      if (w.t[at + 3 * size - 1] > fromS && w.t[at] < toS) continue;
      differences.push(Math.abs(mean(at) - 2 * mean(at + size) + mean(at + 2 * size)));
    }
    if (differences.length < FEWEST_BLOCKS) continue;
    sizes.push(size);
    sum += (1.4826 * median(differences)) ** 2 / 6 - w.noise ** 2 / size;
  }
  return sizes.length === 0 ? 0 : Math.sqrt(Math.max(0, sum / sizes.length));
}
