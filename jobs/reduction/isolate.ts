import { type Baseline, BLOCK_HEIGHT_PART, BLOCK_WIDTHS, baselineAt, FLICKER_WIDTHS, fitBaseline } from './baseline.ts';
import { binsBetween, chooseFlanks } from './choose-flanks.ts';
import { FLANK, type Limits, placeLimits, RAMP_REACH, type Room, widthOf } from './event-limits.ts';
import { type Bell, type Excess, halfWidths, subtractBaseline } from './excess.ts';
import { FlankSums } from './flank-sums.ts';
import { findGlassTransition, GLASS_BEFORE, type GlassTransition } from './glass-transition.ts';
import { CONVERSION_AT_PEAK, CONVERSION_AT_RIGHT_HALF, footArea, footAt } from './shape.ts';
import type { StepUnderEvent } from './step-under-event.ts';
import type { EventWindow } from './window.ts';

export interface Isolated {
  excess: Excess;
  /** one an event, in order of time */
  bells: Bell[];
  /** for refits with moved limits */
  refit: (leftShiftS: number, rightShiftS: number) => Excess;
  glassOverlap: boolean;
  meltingOverlap: boolean;
  /** Where a glass transition was fitted together with the event, and what that leaves open of its area, signal units × s */
  together?: { glass: GlassTransition; areaError: number };
}

export type Isolation = Isolated | { cut: 'before' | 'behind' };

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
    const fitted = fitOnce(w, bells, room, placed, found?.excess);
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
    found = { bells, ...fitted };
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

const nearerEnd = (w: EventWindow, t: number): 'before' | 'behind' =>
  t - w.t[0] < w.t[w.t.length - 1] - t ? 'before' : 'behind';

function fitOnce(
  w: EventWindow,
  bells: Bell[],
  room: Room,
  limits: Limits,
  near: Excess | undefined,
): Omit<Isolated, 'bells'> | undefined {
  const first = bells[0];
  const top = bells.reduce((a, c) => (c.height > a.height ? c : a));
  const width = widthOf(bells);
  const { glassOverlap, meltingOverlap } = limits;
  const sums = new FlankSums(w, top.peakS, width, room.footless ? undefined : first);
  const bin = (w.t[w.t.length - 1] - w.t[0]) / (w.t.length - 1);
  const variance = w.noise ** 2 + Math.max(1, (BLOCK_WIDTHS * width) / bin) * (BLOCK_HEIGHT_PART * top.height) ** 2;
  const open = variance + w.flicker ** 2 * Math.max(1, (FLICKER_WIDTHS * width) / bin);
  const least = Math.max(FLANK.least * width, 3 * bin);
  const flanksAt = (leftS: number, rightS: number) =>
    chooseFlanks(w, sums, room, limits, { leftS, rightS }, { width, height: top.height, variance, least });
  const { glass } = room;
  const steps =
    glassOverlap && glass
      ? { middleS: glass.midpointS, scaleS: glass.scaleS }
      : meltingOverlap || room.footless
        ? 'none'
        : 'free';
  const fitAt = (leftS: number, rightS: number, start: Excess | undefined): Excess | undefined => {
    const baseline = fitBaseline(sums, flanksAt(leftS, rightS), { leftS, rightS }, open, steps);
    if (!baseline) return undefined;
    if (meltingOverlap) return cutAtMelting(w, baseline, top, room);
    // The step being part of the baseline, the event may begin under it.
    const limited = glassOverlap ? { ...baseline, leftS: first.peakS - RAMP_REACH.left.far * first.leftS } : baseline;
    return subtractBaseline(w, limited, room.footless ? 0 : footArea(first, limited.leftS), undefined, start);
  };
  const excess = fitAt(limits.leftS, limits.rightS, near);
  if (!excess) return undefined;
  const refit = (left: number, right: number) => {
    // Without a flank on the left there is no limit to move: the event begins with the hold.
    const alone = limits.leftS - limits.fromS < least;
    const leftS = alone ? limits.leftS : Math.max(limits.leftS + left, limits.fromS + least);
    const rightS = Math.min(limits.rightS + right, limits.toS - least);
    return fitAt(leftS, rightS, excess) ?? excess;
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

/** The event above a baseline that was fitted together with it. @param bell of a first isolation */
export function isolateAbove(w: EventWindow, bell: Bell, fitted: StepUnderEvent): Isolated | undefined {
  const leftS = bell.peakS - RAMP_REACH.left.far * bell.leftS;
  const rightS = Math.min(bell.peakS + RAMP_REACH.right.far * bell.rightS, w.t[w.t.length - 1]);
  const excess = subtractBaseline(w, { ...fitted.baseline, leftS, rightS }, footArea(bell, leftS));
  const own = halfWidths(w, excess, bell.leftS + bell.rightS);
  if (!own) return undefined;
  const { glass, areaError } = fitted;
  return {
    excess,
    bells: [own],
    refit: () => excess,
    glassOverlap: glass.toS > own.peakS - RAMP_REACH.left.near * own.leftS,
    meltingOverlap: false,
    together: { glass, areaError },
  };
}
