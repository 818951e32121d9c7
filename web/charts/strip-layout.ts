import type { ScanMark } from '../model/ledger.ts';
import type { RateScale } from './rate-scale.ts';

export interface PlacedMark {
  mark: ScanMark;
  x: number;
  y: number;
}

export interface StripLayout {
  placed: PlacedMark[];
  height: number;
  /** y of the line on which single marks sit */
  railY: number;
}

/** Width a mark takes, px, and the distance between two marks piled on each other. */
export const MARK_SIZE = 12;
const PILE_STEP = 14;
const MARGIN = 13;

/** Marks in order of rate; one that would touch its neighbour is piled on top, so that repeats can be counted. */
export function layoutStrip(marks: readonly ScanMark[], scale: RateScale): StripLayout {
  const ends: number[] = [];
  const lanes = marks.map((mark) => {
    const x = scale.x(mark.rateKPerS);
    let lane = ends.findIndex((end) => x - end >= MARK_SIZE + 1);
    if (lane < 0) lane = ends.length;
    ends[lane] = x;
    return { mark, x, lane };
  });
  const pile = Math.max(1, ends.length);
  const height = 2 * MARGIN + (pile - 1) * PILE_STEP + 6;
  const railY = height - MARGIN - 3;
  return { placed: lanes.map(({ mark, x, lane }) => ({ mark, x, y: railY - lane * PILE_STEP })), height, railY };
}

/** The mark nearest to a point, within reach of a finger (24 px across, WCAG 2.2 criterion 2.5.8). */
export function nearestMark(layout: StripLayout, x: number, y: number, reach = 16): PlacedMark | undefined {
  let nearest: PlacedMark | undefined;
  let distance = reach;
  for (const placed of layout.placed) {
    const d = Math.hypot(placed.x - x, placed.y - y);
    if (d < distance) {
      nearest = placed;
      distance = d;
    }
  }
  return nearest;
}
