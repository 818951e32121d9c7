import { type Room, widthOf } from './event-limits.ts';
import type { Bell, Excess } from './excess.ts';
import { type Isolated, isolateEvents } from './isolate.ts';
import { bellOf, partExcess, type Separation, separatePeaks } from './separate-peaks.ts';
import type { EventWindow } from './window.ts';

/** A single event is looked at for a hidden second one when one fitted peak misses it by this much of its height (a JMAK event: 1 %) … */
const MISFIT_PART = 0.03;
/** … and the second counts when two peaks leave less than this part of that misfit and hold this part of the area each. */
const MISFIT_LEFT = 0.35;
const LEAST_SHARE = 0.08;

export type Separated = { isolated: Isolated; parts: Excess[] } | { cut: 'before' | 'behind' };

/** Isolates bells that stand together and divides the excess among them; a single one is tested for a hidden companion. */
export function separateEvents(w: EventWindow, bells: Bell[], room: Room): Separated {
  let separation: Separation | undefined;
  const byPeaks = (window: EventWindow, x: Excess, before: Bell[]) => {
    separation = separatePeaks(window, x, before);
    return separation?.peaks.map(bellOf);
  };
  if (bells.length > 1) {
    const isolated = isolateEvents(w, bells, room, byPeaks);
    if ('cut' in isolated) return isolated;
    return { isolated, parts: partExcess(w, isolated.excess, separation!.peaks) };
  }
  const isolated = isolateEvents(w, bells, room);
  if ('cut' in isolated) return isolated;
  const alone = { isolated, parts: [isolated.excess] };
  if (isolated.meltingOverlap || isolated.glassOverlap) return alone;
  const [bell] = isolated.bells;
  const single = separatePeaks(w, isolated.excess, [bell]);
  const limit = MISFIT_PART * bell.height + 1.5 * w.noise;
  if (!single || single.residual < limit) return alone;
  const pair = [-1, 1]
    .map((side) => separatePeaks(w, isolated.excess, splitBell(bell, side)))
    .filter((s) => s !== undefined)
    .sort((a, b) => a.residual - b.residual)[0];
  if (!pair || pair.residual > Math.max(MISFIT_LEFT * single.residual, 1.2 * w.noise)) return alone;
  const peaks = pair.peaks.sort((a, b) => a.peakS - b.peakS).map(bellOf);
  const areas = peaks.map((b) => b.height * (b.leftS + b.rightS));
  if (Math.min(...areas) < LEAST_SHARE * (areas[0] + areas[1])) return alone;
  if (peaks[1].peakS - peaks[0].peakS < 0.3 * widthOf(peaks)) return alone;
  const both = isolateEvents(w, peaks, room, byPeaks);
  if ('cut' in both || !separation) return alone;
  return { isolated: both, parts: partExcess(w, both.excess, separation.peaks) };
}

/** The bell as it is, narrower, and a companion one width to a side. */
function splitBell(b: Bell, side: number): Bell[] {
  const narrow = { ...b, leftS: 0.6 * b.leftS, rightS: 0.6 * b.rightS };
  const other = { ...narrow, height: 0.4 * b.height, peakS: b.peakS + side * (side < 0 ? b.leftS : b.rightS) };
  return side < 0 ? [other, narrow] : [narrow, other];
}
