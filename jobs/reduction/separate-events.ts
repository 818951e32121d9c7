import { FLANK, RAMP_REACH, type Room, widthOf } from './event-limits.ts';
import type { Bell, Excess } from './excess.ts';
import { type Isolated, isolateAbove, isolateEvents } from './isolate.ts';
import { misfitOfOne, partExcess, type Separation, separatePeaks } from './separate-peaks.ts';
import { fitStepUnderEvent } from './step-under-event.ts';
import type { EventWindow } from './window.ts';

/** A single event is looked at for a hidden second one when one fitted peak misses it by this much of its height (a JMAK event: 1 %, a Gaussian 1.7 %) … */
const MISFIT_PART = 0.025;
/** … and the second counts when two peaks leave less than this part of that misfit and hold this part of the area each. */
const MISFIT_LEFT = 0.25;
const LEAST_SHARE = 0.08;

/** … and for a glass transition under it where it is missed by this much. */
const STEP_MISFIT_PART = 0.006;
/** A bump lower than this part of an event may be baseline, or the liquid between a glass transition and the event. */
const BUMP_PART = 0.3;
/** What noise adds to a misfit, errors of a bin. */
const MISFIT_SIGMAS = 1.2;

export type Separated = { isolated: Isolated; parts: Excess[] } | { cut: 'before' | 'behind' };

/** Isolates bells that stand together and divides the excess among them; a single one is tested for a hidden companion. */
export function separateEvents(w: EventWindow, bells: Bell[], room: Room): Separated {
  let separation: Separation | undefined;
  const startS = room.footless ? Math.min(room.fromS, w.t[0]) : undefined;
  const byPeaks = (window: EventWindow, x: Excess, before: Bell[]) => {
    separation = separatePeaks(window, x, before, startS);
    return separation?.bells;
  };
  if (bells.length > 1) {
    const [first, second] = bells;
    const bump = bells.length === 2 && first.height < BUMP_PART * second.height && mayHideStep(w, room);
    const stepped = bump ? aboveStep(w, second, room) : undefined;
    if (stepped) return stepped;
    const isolated = isolateEvents(w, bells, room, byPeaks);
    if ('cut' in isolated) return withoutBumps(w, bells, room) ?? isolated;
    return { isolated, parts: partExcess(w, isolated.excess, separation!) };
  }
  const isolated = isolateEvents(w, bells, room);
  if ('cut' in isolated) return (mayHideStep(w, room) && aboveStep(w, bells[0], room)) || isolated;
  const alone = { isolated, parts: [isolated.excess] };
  if (isolated.meltingOverlap) return alone;
  const [bell] = isolated.bells;
  const single = misfitOfOne(w, isolated.excess, bell, startS);
  const misfit = (part: number) =>
    single === undefined || single > Math.hypot(part * bell.height, MISFIT_SIGMAS * w.noise);
  const near = room.glass !== undefined && room.glass.toS > wishedStart(bell);
  if (mayHideStep(w, room) && (near || misfit(STEP_MISFIT_PART))) {
    const stepped = aboveStep(w, bell, room);
    if (stepped) return stepped;
  }
  if (isolated.glassOverlap || single === undefined || !misfit(MISFIT_PART)) return alone;
  const pair = [-1, 1]
    .map((side) => separatePeaks(w, isolated.excess, splitBell(bell, side), startS))
    .filter((s) => s !== undefined)
    .sort((a, b) => a.residual - b.residual)[0];
  if (!pair || pair.residual > Math.max(MISFIT_LEFT * single, 1.2 * w.noise)) return alone;
  const peaks = pair.bells.sort((a, b) => a.peakS - b.peakS);
  const areas = peaks.map((b) => b.height * (b.leftS + b.rightS));
  if (Math.min(...areas) < LEAST_SHARE * (areas[0] + areas[1])) return alone;
  if (peaks[1].peakS - peaks[0].peakS < 0.3 * widthOf(peaks)) return alone;
  const both = isolateEvents(w, peaks, room, byPeaks);
  if ('cut' in both || !separation) return alone;
  return { isolated: both, parts: partExcess(w, both.excess, separation) };
}

/** The highest of several bells alone, where the others are bumps of the baseline. */
function withoutBumps(w: EventWindow, bells: Bell[], room: Room): Separated | undefined {
  const [highest, second] = [...bells].sort((a, b) => b.height - a.height);
  if (second.height > BUMP_PART * highest.height) return undefined;
  const alone = separateEvents(w, [highest], room);
  return 'cut' in alone ? undefined : alone;
}

/** Where a flank of full length before the event would begin, s. */
const wishedStart = (b: Bell): number => b.peakS - RAMP_REACH.left.far * b.leftS - FLANK.wished * (b.leftS + b.rightS);

/** The event with the glass transition under it, where one is. */
function aboveStep(w: EventWindow, bell: Bell, room: Room): Separated | undefined {
  const step = fitStepUnderEvent(w, bell, room);
  const isolated = step && isolateAbove(w, bell, step);
  return isolated && { isolated, parts: [isolated.excess] };
}

/** On heating, where the user has not said what the event is. */
const mayHideStep = (w: EventWindow, room: Room): boolean =>
  !room.footless && !room.limits && w.T[w.T.length - 1] > w.T[0];

/** The bell as it is, narrower, and a companion one width to a side. */
function splitBell(b: Bell, side: number): Bell[] {
  const narrow = { ...b, leftS: 0.6 * b.leftS, rightS: 0.6 * b.rightS };
  const other = { ...narrow, height: 0.4 * b.height, peakS: b.peakS + side * (side < 0 ? b.leftS : b.rightS) };
  return side < 0 ? [other, narrow] : [narrow, other];
}
