import { CONVERSION_COUNT, CONVERSIONS, distinctRates, type EventColumns } from '../event-data.ts';

/** ln[−ln(1−α)] at the conversions of the table. */
export const LN_LN: readonly number[] = CONVERSIONS.map((a) => Math.log(-Math.log1p(-a)));
const LEAST_RATES = 3;
const TEMPERATURES = 9;
const SEARCH_STEPS = 200;

/**
 * Temperatures at which at least three distinct rates have 0.05 < α < 0.95, evenly spread over where that holds; empty where it does
 * nowhere (rates within a factor 7.6, 3.9, 2.8 are needed for n = 2, 3, 4).
 */
export function ozawaTemperatures(d: EventColumns, curves: ArrayLike<number>): number[] {
  let low = Number.POSITIVE_INFINITY;
  let high = 0;
  for (let j = 0; j < curves.length; j++) {
    const [a, b] = span(d, curves[j]);
    low = Math.min(low, a);
    high = Math.max(high, b);
  }
  const good: number[] = [];
  for (let s = 1; s < SEARCH_STEPS; s++) {
    const T = low + ((high - low) * s) / SEARCH_STEPS;
    const inside = Array.from(curves).filter((i) => {
      const [a, b] = span(d, i);
      return T > a && T < b;
    });
    if (distinctRates(inside.map((i) => Math.abs(d.rate[i]))).length >= LEAST_RATES) good.push(T);
  }
  if (good.length <= TEMPERATURES) return good;
  return Array.from(
    { length: TEMPERATURES },
    (_, k) => good[Math.round(((good.length - 1) * (k + 0.5)) / TEMPERATURES)],
  );
}

/** Temperatures at α = 0.05 and 0.95, the lower first (on cooling α rises as T falls). */
function span(d: EventColumns, i: number): [number, number] {
  const a = d.temperatureK[i * CONVERSION_COUNT];
  const b = d.temperatureK[i * CONVERSION_COUNT + CONVERSION_COUNT - 1];
  return a < b ? [a, b] : [b, a];
}

/**
 * Ozawa 1971 (Polymer 12:150): at one temperature ln[−ln(1−α)] = ln χ(T) − n ln|β|. One common slope through the temperatures given, each
 * with its own χ; heating or cooling. NaN where fewer than three points share a temperature.
 * @param lnRate ln|β| of each scan, β in K/s   @param weights of the curve scans
 */
export function fitOzawa(
  d: EventColumns,
  curves: ArrayLike<number>,
  lnRate: ArrayLike<number>,
  weights: ArrayLike<number>,
  temperatures: readonly number[],
): number {
  let xx = 0;
  let xy = 0;
  for (const T of temperatures) {
    let n = 0;
    let sw = 0;
    let sx = 0;
    let sy = 0;
    let sxx = 0;
    let sxy = 0;
    for (let j = 0; j < curves.length; j++) {
      const y = lnLnAt(d, curves[j], T);
      if (Number.isNaN(y)) continue;
      const w = weights[j];
      const x = lnRate[j];
      n++;
      sw += w;
      sx += w * x;
      sy += w * y;
      sxx += w * x * x;
      sxy += w * x * y;
    }
    if (n < LEAST_RATES) continue;
    xx += sxx - (sx * sx) / sw;
    xy += sxy - (sx * sy) / sw;
  }
  return xx > 0 ? -xy / xx : Number.NaN;
}

/** ln[−ln(1−α)] of a scan at T, linear in 1/T between the conversions of the table (there it is all but straight); NaN outside them. */
function lnLnAt(d: EventColumns, scan: number, T: number): number {
  const at = scan * CONVERSION_COUNT;
  const first = d.temperatureK[at];
  const last = d.temperatureK[at + CONVERSION_COUNT - 1];
  const rising = last > first;
  if (rising ? T < first || T >= last : T > first || T <= last) return Number.NaN;
  for (let k = 1; k < CONVERSION_COUNT; k++) {
    const a = d.temperatureK[at + k - 1];
    const b = d.temperatureK[at + k];
    if (rising ? T >= a && T < b : T <= a && T > b) {
      return LN_LN[k - 1] + ((LN_LN[k] - LN_LN[k - 1]) * (1 / T - 1 / a)) / (1 / b - 1 / a);
    }
  }
  return Number.NaN;
}
