/** A line from numbers to px; made by hand, since a library of scales is a third of the page's script. */
export interface Scale {
  at(value: number): number;
  /** The number at a px */
  valueAt(px: number): number;
}

type Pair = readonly [number, number];

/** From `domain` to `range` and beyond both ends; a domain of no width falls in the middle of the range. */
export function linearScale([low, high]: Pair, [from, to]: Pair): Scale {
  const slope = (to - from) / (high - low);
  if (!Number.isFinite(slope)) return { at: () => (from + to) / 2, valueAt: () => low };
  return { at: (value) => from + (value - low) * slope, valueAt: (px) => low + (px - from) / slope };
}

/** The same over the logarithms of positive numbers. */
export function logScale([low, high]: Pair, range: Pair): Scale {
  const scale = linearScale([Math.log10(low), Math.log10(high)], range);
  return { at: (value) => scale.at(Math.log10(value)), valueAt: (px) => 10 ** scale.valueAt(px) };
}

/**
 * About `count` round numbers from `low` to `high`: multiples of 1, 2 or 5 times a power of ten, the step being the one whose ratio to
 * the wanted step is nearest to 1.
 */
export function roundTicks(low: number, high: number, count: number): number[] {
  const wanted = (high - low) / count;
  if (!(wanted > 0 && Number.isFinite(wanted))) return [low];
  const power = Math.floor(Math.log10(wanted));
  const ratio = wanted / 10 ** power;
  const factor = ratio >= Math.sqrt(50) ? 10 : ratio >= Math.sqrt(10) ? 5 : ratio >= Math.SQRT2 ? 2 : 1;
  // Below 1 a step is one over a whole number: dividing by it gives the shortest decimals.
  const [times, over] = power < 0 ? [1, 10 ** -power / factor] : [factor * 10 ** power, 1];
  const first = Math.ceil((low / times) * over);
  const last = Math.floor((high / times) * over);
  // One number is asked for and none falls within.
  if (last < first && count < 2) return roundTicks(low, high, 2 * count);
  return Array.from({ length: Math.max(0, last - first + 1) }, (_, i) => ((first + i) * times) / over);
}
