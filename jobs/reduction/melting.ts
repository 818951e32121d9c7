import { findExcursions } from './find-event.ts';

/** An endotherm behind an event: times in s. */
export interface Melting {
  /** extrapolated onset: tangent at the steepest point of its leading edge against the level before */
  onsetS: number;
  bottomS: number;
  /** first trace of it, and where the signal has come back */
  fromS: number;
  toS: number;
}

/** An endotherm counts from this part of the event's height on. */
const LEAST_PART = 0.15;
/** … and up to this many of its widths: wider is drift. */
const WIDEST = 3;
/** Its tails are gone this many half widths from its bottom (a logistic melting has fallen to 0.2 %). */
const TAIL_HALF_WIDTHS = 5;

/** First endotherm in rows [from, to) that matters beside an event of the given height. @param y heat flow, exotherm up */
export function findMelting(
  t: Float64Array,
  y: Float64Array,
  from: number,
  to: number,
  height: number,
  widthS: number,
): Melting | undefined {
  const flipped = y.subarray(from, to).map((v) => -v);
  const found = findExcursions(t.subarray(from, to), flipped, 0, to - from)
    .filter((x) => x.prominence > LEAST_PART * height && x.spanS < WIDEST * widthS)
    .sort((a, b) => a.peakS - b.peakS)[0];
  if (!found) return undefined;
  return {
    // The tangent through the half height of a bell is down one half width further out, within a fifth of that width.
    onsetS: found.peakS - 2 * found.leftS,
    bottomS: found.peakS,
    fromS: found.peakS - TAIL_HALF_WIDTHS * found.leftS,
    toS: found.peakS + TAIL_HALF_WIDTHS * found.rightS,
  };
}
