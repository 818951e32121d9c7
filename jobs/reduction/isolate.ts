import { lowerBound } from '../numeric/local-polynomial.ts';
import { type Baseline, BLOCK_HEIGHT_PART, BLOCK_WIDTHS, baselineAt, type Flanks, fitBaseline } from './baseline.ts';
import { type Bell, type Excess, halfWidths, subtractBaseline } from './excess.ts';
import { FlankSums } from './flank-sums.ts';
import { findGlassTransition, GLASS_BEFORE, type GlassTransition } from './glass-transition.ts';
import type { Melting } from './melting.ts';
import { CONVERSION_AT_PEAK, CONVERSION_AT_RIGHT_HALF, footArea, footAt } from './shape.ts';
import type { EventWindow } from './window.ts';

/** What bounds the flanks of an event, s. */
export interface Room {
  /** End of whatever comes before (an event), start of whatever follows; the window's ends where nothing does */
  fromS: number;
  toS: number;
  glass?: GlassTransition;
  melting?: Melting;
  /** First-order response of the signal, s: an exponential tail */
  responseS: number;
  /** An isothermal event or a metal's melting: no exponential foot, a longer tail, no step of the heat capacity, no need of a flank before it */
  footless?: boolean;
  /** Area of the whole event where mass and enthalpy are known, signal units × s; used where its end is hidden */
  knownArea?: number;
}

export interface Isolated {
  excess: Excess;
  /** one an event, in order of time */
  bells: Bell[];
  /** for refits with moved limits */
  refit: (leftShiftS: number, rightShiftS: number) => Excess;
  glassOverlap: boolean;
  meltingOverlap: boolean;
}

export type Isolation = Isolated | { cut: 'before' | 'behind' };

/** Limits in half widths from the peak, where there is room and where there is not: 0.2 % and 3 % of the height, 0.1 % and 1 % are left. */
const RAMP_REACH = { left: { far: 5, near: 3.3 }, right: { far: 3.2, near: 2.4 } };
/** On a hold a JMAK event of n ≤ 4 begins at most 2.4 left half widths before its peak; 0.1 % are left 2.4 (n = 3) to 3.6 (n = 1.5) right ones behind it. */
const HOLD_REACH = { left: { far: 3.5, near: 2.5 }, right: { far: 4.2, near: 2.7 } };
/** The tail of a response: 0.25 % are left after six time constants. */
const RESPONSE_TAILS = 6;
const LEAST_RESPONSE_TAILS = 3.5;
/**
 * A JMAK event with n ≥ 2 begins at rate 0 and rises at most linearly: the first piece of a hold is baseline to this part of the height,
 * unless it stands out of the baseline behind the event (n = 1.5: by a third of the height).
 */
const HOLD_START = { widths: 0.05, heightPart: 0.03, mostPart: 0.2 };
/** Flank wished for, shortest one that counts, and the longest looked at, widths. */
const FLANK = { wished: 0.8, least: 0.35, longest: 4.5 };
/** Lengths tried when the longest flank is no smooth baseline. */
const SHORTER = [1, 0.7, 0.5, 0.35, 0.25];
/** A flank is smooth while a cubic leaves no more than this much of what a short piece leaves. */
const SMOOTH_RATIO = 1.8;
/** A tail that still stands this much above the baseline (part of the height, and in errors) moves its limit out by one half width. */
const TAIL_HEIGHT_PART = 0.003;
const TAIL_SIGMAS = 4;
const ROUNDS = 7;
/** Rough bells on a strong drift come out too wide: narrower ones are tried before an event counts as cut. */
const NARROWER = [1, 0.6, 0.35];

/**
 * Finds limits, baseline and shape of an event, or of several that overlap, together.
 * @param start rough bells in order of time   @param shapeOf bells of the excess; by default its one bell
 */
export function isolateEvents(
  w: EventWindow,
  start: Bell[],
  room: Room,
  shapeOf: (w: EventWindow, x: Excess, before: Bell[]) => Bell[] | undefined = oneBell,
): Isolation {
  let found: Isolation = { cut: 'behind' };
  for (const factor of NARROWER) {
    const bells = start.map((b) => ({ ...b, leftS: factor * b.leftS, rightS: factor * b.rightS }));
    const tried = isolateFrom(w, bells, room, shapeOf);
    if (!('cut' in tried)) return tried;
    if (factor === 1) found = tried;
  }
  return found;
}

function isolateFrom(
  w: EventWindow,
  start: Bell[],
  around: Room,
  shapeOf: (w: EventWindow, x: Excess, before: Bell[]) => Bell[] | undefined,
): Isolation {
  let bells = start;
  let found: Isolated | undefined;
  let room = around;
  const extra = { left: 0, right: 0 };
  for (let round = 0; round < ROUNDS; round++) {
    const placed = placeLimits(w, bells, room, extra);
    if ('cut' in placed) return placed;
    const fitted = fitOnce(w, bells, room, placed);
    if (!fitted) return { cut: nearerEnd(w, bells[0].peakS) };
    const next = shapeOf(w, fitted.excess, bells);
    if (!next) return { cut: nearerEnd(w, bells[0].peakS) };
    const width = widthOf(bells);
    const settled = next.every(
      (b, i) =>
        Math.abs(b.leftS - bells[i].leftS) < 0.02 * width &&
        Math.abs(b.rightS - bells[i].rightS) < 0.02 * width &&
        Math.abs(b.peakS - bells[i].peakS) < 0.05 * width,
    );
    bells = next;
    found = { ...fitted, bells };
    if (!settled) continue;
    if (found.glassOverlap && room === around) {
      // Now that the event's foot is known, the step can be told from it better.
      const end = binsBetween(w, bells[0].peakS - GLASS_BEFORE * bells[0].leftS, bells[0].peakS)[0];
      const glass = findGlassTransition(w.t, w.y, 0, end, w.noise, bells[0]);
      room = { ...room, ...(glass && { glass }) };
      continue;
    }
    const before = placed.freeLeft && !room.footless && tailStands(w, found, 'left');
    const behind = placed.freeRight && tailStands(w, found, 'right');
    if (!before && !behind) break;
    if (before) extra.left += 1;
    if (behind) extra.right += 1;
  }
  return found ?? { cut: 'behind' };
}

const oneBell = (w: EventWindow, x: Excess, [before]: Bell[]): Bell[] | undefined => {
  const bell = halfWidths(w, x, before.leftS + before.rightS);
  return bell && [bell];
};

/** Full width of the highest event, s. */
export const widthOf = (bells: Bell[]): number => {
  const b = bells.reduce((a, c) => (c.height > a.height ? c : a));
  return b.leftS + b.rightS;
};

const nearerEnd = (w: EventWindow, t: number): 'before' | 'behind' =>
  t - w.t[0] < w.t[w.t.length - 1] - t ? 'before' : 'behind';

interface Limits {
  leftS: number;
  rightS: number;
  /** outer ends of the flanks, s */
  fromS: number;
  toS: number;
  freeLeft: boolean;
  freeRight: boolean;
  glassOverlap: boolean;
  meltingOverlap: boolean;
}

function placeLimits(
  w: EventWindow,
  bells: Bell[],
  room: Room,
  extra: { left: number; right: number },
): Limits | { cut: 'before' | 'behind' } {
  const n = w.t.length;
  const [first, last] = [bells[0], bells[bells.length - 1]];
  const width = widthOf(bells);
  const bin = (w.t[n - 1] - w.t[0]) / (n - 1);
  const least = Math.max(FLANK.least * width, 3 * bin);

  const reach = room.footless ? HOLD_REACH : RAMP_REACH;
  const edgeLeft = Math.max(room.fromS, w.t[0]);
  const glassEnd = room.glass && room.glass.toS > edgeLeft ? room.glass.toS : edgeLeft;
  const nearLeft = first.peakS - reach.left.near * first.leftS;
  const farLeft = first.peakS - (reach.left.far + extra.left) * first.leftS;
  let fromS = glassEnd;
  let leftS = Math.min(nearLeft, Math.max(farLeft, fromS + FLANK.wished * width));
  let glassOverlap = false;
  if (leftS - fromS < least) {
    if (fromS === edgeLeft && !room.footless) return { cut: 'before' };
    // On a hold the event may begin at once. On a ramp the glass transition reaches into the event: its own glass side gives slope and curvature, the level comes from the right.
    glassOverlap = !room.footless;
    fromS = edgeLeft;
    leftS = room.glass?.fromS ?? edgeLeft;
  }

  const edgeRight = Math.min(room.toS, w.t[n - 1]);
  const meltingStart = room.melting && room.melting.fromS < edgeRight ? room.melting.fromS : edgeRight;
  const nearRight = last.peakS + Math.max(reach.right.near * last.rightS, LEAST_RESPONSE_TAILS * room.responseS);
  const farRight =
    last.peakS + Math.max((reach.right.far + extra.right) * last.rightS, RESPONSE_TAILS * room.responseS);
  let toS = meltingStart;
  let rightS = Math.max(nearRight, Math.min(farRight, toS - FLANK.wished * width));
  let meltingOverlap = false;
  if (toS - rightS < least) {
    if (toS === edgeRight) return { cut: 'behind' };
    meltingOverlap = true;
    toS = edgeRight;
    rightS = Math.max(room.melting!.toS, nearRight);
  }
  return {
    leftS,
    rightS,
    fromS,
    toS,
    freeLeft: leftS <= farLeft && !glassOverlap,
    freeRight: rightS >= farRight && !meltingOverlap,
    glassOverlap,
    meltingOverlap,
  };
}

function fitOnce(w: EventWindow, bells: Bell[], room: Room, limits: Limits): Omit<Isolated, 'bells'> | undefined {
  const first = bells[0];
  const top = bells.reduce((a, c) => (c.height > a.height ? c : a));
  const width = widthOf(bells);
  const { glassOverlap, meltingOverlap } = limits;
  const sums = new FlankSums(w, top.peakS, width, room.footless ? undefined : first);
  const bin = (w.t[w.t.length - 1] - w.t[0]) / (w.t.length - 1);
  const variance = w.noise ** 2 + Math.max(1, (BLOCK_WIDTHS * width) / bin) * (BLOCK_HEIGHT_PART * top.height) ** 2;
  const least = Math.max(FLANK.least * width, 3 * bin);
  const flanksAt = (leftS: number, rightS: number): Flanks => {
    const right = binsBetween(w, rightS, Math.min(limits.toS, rightS + FLANK.longest * width));
    const fromS = Math.max(limits.fromS, leftS - FLANK.longest * width);
    const start = { left: binsBetween(w, fromS, fromS + HOLD_START.widths * width + 3 * bin) };
    if (room.footless && leftS - fromS < least) {
      const count = start.left[1] - start.left[0];
      const alone: Flanks = { left: [0, 0], right: smoothFlank(sums, right, 'right', variance) };
      const first = fitBaseline(sums, alone, { leftS, rightS }, variance, 'none');
      const above = first ? meanAbove(w, first, start.left) : 0;
      if (above > HOLD_START.mostPart * top.height) return alone;
      const leftWeight = Math.min(1, variance / (count * (HOLD_START.heightPart * top.height) ** 2));
      return { ...alone, ...start, leftWeight };
    }
    return {
      left: smoothFlank(sums, binsBetween(w, fromS, leftS), 'left', variance),
      right: smoothFlank(sums, right, 'right', variance),
    };
  };
  const { glass } = room;
  const steps =
    glassOverlap && glass
      ? { middleS: glass.midpointS, scaleS: glass.scaleS }
      : meltingOverlap || room.footless
        ? 'none'
        : 'free';
  const fitAt = (leftS: number, rightS: number): Excess | undefined => {
    const baseline = fitBaseline(sums, flanksAt(leftS, rightS), { leftS, rightS }, variance, steps);
    if (!baseline) return undefined;
    if (meltingOverlap) return cutAtMelting(w, baseline, top, room);
    // The step being part of the baseline, the event may begin under it.
    const limited = glassOverlap ? { ...baseline, leftS: first.peakS - RAMP_REACH.left.far * first.leftS } : baseline;
    return subtractBaseline(w, limited, room.footless ? 0 : footArea(first, limited.leftS));
  };
  const excess = fitAt(limits.leftS, limits.rightS);
  if (!excess) return undefined;
  const refit = (left: number, right: number) => {
    // Without a flank on the left there is no limit to move: the event begins with the hold.
    const alone = limits.leftS - limits.fromS < least;
    const leftS = alone ? limits.leftS : Math.max(limits.leftS + left, limits.fromS + least);
    const rightS = Math.min(limits.rightS + right, limits.toS - least);
    return fitAt(leftS, rightS) ?? excess;
  };
  return { excess, refit, glassOverlap, meltingOverlap };
}

/**
 * The event ends where it falls to the baseline on its way down into the melting. Its whole area is the known one, else what a JMAK
 * shape of the area up to its right half height (or its peak, where melting cuts in earlier) amounts to.
 */
function cutAtMelting(w: EventWindow, baseline: Baseline, top: Bell, room: Room): Excess {
  let end = 0;
  while (end < w.t.length - 1 && w.t[end] < top.peakS) end++;
  while (end < w.t.length - 1 && w.y[end] > baselineAt(baseline, w.t[end], 1)) end++;
  const limited = { ...baseline, rightS: w.t[Math.max(0, end - 1)] };
  const foot = footArea(top, baseline.leftS);
  if (room.knownArea !== undefined) return subtractBaseline(w, limited, foot, room.knownArea);
  const open = subtractBaseline(w, limited, foot);
  const bell = halfWidths(w, open, top.leftS + top.rightS);
  const at =
    bell && bell.peakS + bell.rightS < (room.melting?.onsetS ?? limited.rightS) ? bell.peakS + bell.rightS : top.peakS;
  const share = at === top.peakS ? CONVERSION_AT_PEAK : CONVERSION_AT_RIGHT_HALF;
  let i = open.from;
  while (i < open.to - 1 && w.t[i] < at) i++;
  return subtractBaseline(w, limited, foot, open.cumulative[i] / share);
}

const binsBetween = (w: EventWindow, fromS: number, toS: number): [number, number] => {
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
  const degree = (b: [number, number]) => (sums.lengthOf(b) > 2 ? 3 : 2);
  const short = piece(SHORTER[SHORTER.length - 1]);
  const allowed = SMOOTH_RATIO * Math.max(variance, sums.scatter(short, degree(short)));
  for (const part of SHORTER) {
    const tried = piece(part);
    if (sums.scatter(tried, degree(tried)) <= allowed) return tried;
  }
  return short;
}

function tailStands(w: EventWindow, { excess: x, bells }: Isolated, side: 'left' | 'right'): boolean {
  const { leftS, rightS } = x.baseline;
  const [first, last] = [bells[0], bells[bells.length - 1]];
  const [fromS, toS] = side === 'left' ? [leftS, leftS + 0.7 * first.leftS] : [rightS - 0.7 * last.rightS, rightS];
  const height = Math.max(...bells.map((b) => b.height));
  let sum = 0;
  let count = 0;
  for (let i = x.from; i < x.to; i++) {
    if (w.t[i] < fromS || w.t[i] > toS) continue;
    sum += x.e[i] - (side === 'left' ? footAt(first, w.t[i]) : 0);
    count++;
  }
  if (count < 3) return false;
  return sum / count > TAIL_HEIGHT_PART * height + (TAIL_SIGMAS * w.noise) / Math.sqrt(count);
}
