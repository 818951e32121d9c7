import { lowerBound } from '../numeric/local-polynomial.ts';
import { type Baseline, baselineAt, type Flanks, fitBaseline } from './baseline.ts';
import { FLANK, type Limits, type Room } from './event-limits.ts';
import type { FlankSums } from './flank-sums.ts';
import type { EventWindow } from './window.ts';

/**
 * A JMAK event with n ≥ 2 begins at rate 0 and rises at most linearly: the first piece of a hold is baseline to this part of the height,
 * unless it stands out of the baseline behind the event (n = 1.5: by a third of the height).
 */
const HOLD_START = { widths: 0.05, heightPart: 0.03, mostPart: 0.2 };
/** Lengths tried when the longest flank is no smooth baseline. */
const SHORTER = [1, 0.7, 0.5, 0.35, 0.25];
/** A flank is smooth while a cubic leaves no more than this much of what a short piece leaves. */
const SMOOTH_RATIO = 1.8;

/** The stretches beside an event that hold nothing but baseline. @param about the event: width and shortest flank in s, height, variance of a bin */
export function chooseFlanks(
  w: EventWindow,
  sums: FlankSums,
  room: Room,
  limits: Limits,
  { leftS, rightS }: { leftS: number; rightS: number },
  { width, height, variance, least }: { width: number; height: number; variance: number; least: number },
): Flanks {
  const bin = (w.t[w.t.length - 1] - w.t[0]) / (w.t.length - 1);
  const right = binsBetween(w, rightS, Math.min(limits.toS, rightS + FLANK.longest * width));
  const fromS = Math.max(limits.fromS, leftS - FLANK.longest * width);
  const start = { left: binsBetween(w, fromS, fromS + HOLD_START.widths * width + 3 * bin) };
  if (room.footless && leftS - fromS < least) {
    const count = start.left[1] - start.left[0];
    const alone: Flanks = { left: [0, 0], right: smoothFlank(sums, right, 'right', variance) };
    const first = fitBaseline(sums, alone, { leftS, rightS }, variance, 'none');
    const above = first ? meanAbove(w, first, start.left) : 0;
    if (above > HOLD_START.mostPart * height) return alone;
    const leftWeight = Math.min(1, variance / (count * (HOLD_START.heightPart * height) ** 2));
    return { ...alone, ...start, leftWeight };
  }
  return {
    left: smoothFlank(sums, binsBetween(w, fromS, leftS), 'left', variance),
    right: smoothFlank(sums, right, 'right', variance),
  };
}

export const binsBetween = (w: EventWindow, fromS: number, toS: number): [number, number] => {
  const a = lowerBound(w.t, fromS);
  return [a, Math.max(a, lowerBound(w.t, toS))];
};

function meanAbove(w: EventWindow, b: Baseline, [from, to]: readonly [number, number]): number {
  let sum = 0;
  for (let i = from; i < to; i++) sum += w.y[i] - baselineAt(b, w.t[i], 0);
  return to > from ? sum / (to - from) : 0;
}

/** The longest part next to the event that a cubic describes as well as it does a short part: steps and peaks further out stay out. */
function smoothFlank(
  sums: FlankSums,
  bins: [number, number],
  side: 'left' | 'right',
  variance: number,
): [number, number] {
  const piece = (part: number): [number, number] => {
    const length = Math.max(4, Math.round(part * (bins[1] - bins[0])));
    return side === 'left'
      ? [Math.max(bins[0], bins[1] - length), bins[1]]
      : [bins[0], Math.min(bins[1], bins[0] + length)];
  };
  const degree = (b: [number, number]) => (sums.lengthOf(b) > 2 ? 3 : (2 as const));
  const short = piece(SHORTER[SHORTER.length - 1]);
  const allowed = SMOOTH_RATIO * Math.max(variance, sums.scatter(short, degree(short)));
  for (const part of SHORTER) {
    const tried = piece(part);
    if (sums.scatter(tried, degree(tried)) <= allowed) return tried;
  }
  return short;
}
