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
  /** file rows a bin */
  binSize: number;
  /** First-order response that y has been freed of already, s */
  undoneS: number;
}

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
  return { ...out, noise: rowNoise / Math.sqrt(size), binSize: size, undoneS: 0 };
}
