import { formatPowerOfTen, rateInUnit, type Units } from '../format.ts';
import { logScale } from './scales.ts';

/** Places heating rates on a logarithmic axis of a given width in px. Pure: the same on the page and on the server. */
export interface RateScale {
  width: number;
  /** px of a rate in K/s; null (rate unknown) falls in the margin left of the axis. */
  x(rateKPerS: number | null): number;
  /** Left end of the axis, px */
  start: number;
  unit: Units['rate'];
  decades: { x: number; label: string; hasLabel: boolean }[];
  /** px of 2 … 9 times each power of ten, as on logarithmic paper */
  steps: number[];
}

/** Room for marks without a rate, px. */
export const UNRATED_WIDTH = 52;
const PADDING = 14;
/** Least distance between two axis labels, px. */
const LABEL_DISTANCE = 42;
/** Narrowest decade that is ruled within, px. */
const RULED_DECADE = 56;

export function createRateScale(ratesKPerS: readonly (number | null)[], width: number, units: Units): RateScale {
  const rated = ratesKPerS.filter((rate): rate is number => rate !== null);
  const start = rated.length < ratesKPerS.length ? UNRATED_WIDTH : 0;
  const logs = rated.map((rate) => Math.log10(rateInUnit(rate, units)));
  let low = logs.length > 0 ? Math.min(...logs) - 0.15 : 0;
  let high = logs.length > 0 ? Math.max(...logs) + 0.15 : 2;
  // At least two decades, so that a few close rates do not look like a wide span.
  const missing = Math.max(0, 2 - (high - low)) / 2;
  low -= missing;
  high += missing;

  const { at } = logScale([10 ** low, 10 ** high], [start + PADDING, Math.max(start + 2 * PADDING, width - PADDING)]);
  const decadeWidth = at(10) - at(1);
  const every = Math.max(1, Math.ceil(LABEL_DISTANCE / decadeWidth));
  const decades = [];
  const steps = [];
  for (let exponent = Math.floor(low); exponent <= high; exponent++) {
    for (let factor = 2; factor < 10 && decadeWidth >= RULED_DECADE; factor++) {
      const value = factor * 10 ** exponent;
      if (value > 10 ** low && value < 10 ** high) steps.push(at(value));
    }
    if (exponent < low) continue;
    const hasLabel = exponent % every === 0;
    decades.push({ x: at(10 ** exponent), label: formatPowerOfTen(exponent), hasLabel });
  }
  const x = (rate: number | null): number => (rate === null ? start / 2 : at(rateInUnit(rate, units)));
  return { width, x, start, unit: units.rate, decades, steps };
}
