import { lowerBound } from '../numeric/local-polynomial.ts';
import type { Bell } from './excess.ts';
import { type Excursion, findExcursions, noiseSigma } from './find-event.ts';
import { FlankSums } from './flank-sums.ts';
import { averageWindow } from './window.ts';

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
/** The event is over this many right half widths behind its peak (1 % are left); a cubic leaves no more than this of a drift. */
const EVENT_OVER = 2.2;
const DRIFT_PART = 0.03;
const DRIFT_SIGMAS = 1.5;
/** Its tails are gone this many half widths from its bottom (a logistic melting has fallen to 0.2 %). */
const TAIL_HALF_WIDTHS = 5;

/** First endotherm in rows [from, to) that matters beside an event. @param y heat flow, exotherm up   @param height of the highest event */
export function findMelting(
  t: Float64Array,
  y: Float64Array,
  from: number,
  to: number,
  height: number,
  bell: Bell,
): Melting | undefined {
  if (largestRise(y, from, to) < LEAST_PART * height) return undefined;
  const flipped = y.subarray(from, to).map((v) => -v);
  const found = findExcursions(t.subarray(from, to), flipped, 0, to - from)
    .filter((x) => x.prominence > LEAST_PART * height && x.spanS < WIDEST * (bell.leftS + bell.rightS))
    .sort((a, b) => a.peakS - b.peakS)[0];
  if (!found || isDrift(t, y, { ...bell, height }, found, to)) return undefined;
  return {
    // The tangent through the half height of a bell is down one half width further out, within a fifth of that width.
    onsetS: found.peakS - 2 * found.leftS,
    bottomS: found.peakS,
    fromS: found.peakS - TAIL_HALF_WIDTHS * found.leftS,
    toS: found.peakS + TAIL_HALF_WIDTHS * found.rightS,
  };
}

/** How far the signal climbs again from its lowest point so far: no endotherm is more prominent. Most scans end the search here. */
function largestRise(y: Float64Array, from: number, to: number): number {
  let low = Number.POSITIVE_INFINITY;
  let most = 0;
  for (let i = from; i < to; i++) {
    if (y[i] < low) low = y[i];
    else if (y[i] - low > most) most = y[i] - low;
  }
  return most;
}

/** A dip that a cubic over the stretch behind the event describes is a drift. */
function isDrift(t: Float64Array, y: Float64Array, bell: Bell, dip: Excursion, to: number): boolean {
  const width = bell.leftS + bell.rightS;
  const a = lowerBound(t, bell.peakS + EVENT_OVER * bell.rightS);
  const b = Math.min(to, lowerBound(t, dip.peakS + WIDEST * width));
  if (b - a < 8) return false;
  const noise = noiseSigma(y, a, b);
  const w = averageWindow(t, t, y, a, b, width, noise);
  const scatter = new FlankSums(w, dip.peakS, width, undefined).scatter([0, w.t.length], 3);
  return scatter < DRIFT_SIGMAS ** 2 * w.noise ** 2 + (DRIFT_PART * bell.height) ** 2;
}
