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
export const MARK_SIZE = 14;
const PILE_STEP = 16;
const MARGIN = 17;

/** Splits marks, in order of x, into as few layers as needed for no two of a layer to touch. */
function splitLayers<Item extends { x: number }>(items: readonly Item[]): Item[][] {
  const layers: Item[][] = [];
  for (const item of items) {
    const free = layers.find((layer) => !touches(item, layer.at(-1)));
    if (free) free.push(item);
    else layers.push([item]);
  }
  return layers;
}

const touches = (a: { x: number }, b: { x: number } | undefined): boolean =>
  b !== undefined && Math.abs(a.x - b.x) < MARK_SIZE + 1;

/**
 * Places marks at their rates. Marks that would touch are piled: the scans of one instrument stay on one level, its
 * repeats on the next free one, so that repeats can be counted and the reach of each instrument shows as a line.
 * Placed marks come in the order of `marks`.
 */
export function layoutStrip(marks: readonly ScanMark[], scale: RateScale): StripLayout {
  const items = marks.map((mark) => ({ mark, x: scale.x(mark.rateKPerS), level: 0 }));
  const instruments = [...new Set(marks.map((mark) => mark.instrument))];
  const layers = instruments.flatMap((name) => splitLayers(items.filter((item) => item.mark.instrument === name)));
  const levels: { x: number }[][] = [];
  for (const layer of layers) {
    const fits = (level: { x: number }[]): boolean => layer.every((a) => !level.some((b) => touches(a, b)));
    let level = levels.findIndex(fits);
    if (level < 0) level = levels.push([]) - 1;
    levels[level].push(...layer);
    for (const item of layer) item.level = level;
  }
  const height = 2 * MARGIN + Math.max(0, levels.length - 1) * PILE_STEP;
  const railY = height - MARGIN;
  return { placed: items.map(({ mark, x, level }) => ({ mark, x, y: railY - level * PILE_STEP })), height, railY };
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
