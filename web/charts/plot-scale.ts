import { celsiusFromKelvin, kelvinFromCelsius } from '../../schema/wire/units.ts';
import { formatFixed, type Units } from '../format.ts';
import { linearScale, logScale, roundTicks } from './scales.ts';

/** A linear axis of a plot. Pure: the same on the page and on the server. */
export interface PlotScale {
  /** px of a value in the unit of the data */
  at(value: number): number;
  /** Value in the unit of the data at a px */
  valueAt(px: number): number;
  /** px where the axis begins and ends */
  range: [number, number];
  ticks: { at: number; label: string }[];
}

interface ScaleOptions {
  /** Wanted count of ticks */
  count?: number;
  /** Shown number of a value; rising with it */
  shown?(value: number): number;
  hidden?(shown: number): number;
}

const same = (value: number): number => value;

/** Covers `values` with a little room at both ends; a single value gets room in proportion to its size. */
export function createPlotScale(
  values: readonly number[],
  range: [number, number],
  { count = 5, shown = same, hidden = same }: ScaleOptions = {},
): PlotScale {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    if (!Number.isFinite(value)) continue;
    if (value < low) low = value;
    if (value > high) high = value;
  }
  if (low > high) [low, high] = [0, 1];
  // Room is made in the numbers shown: a logarithm has none below its lowest value otherwise.
  const [first, last] = [shown(low), shown(high)];
  const room = last > first ? (last - first) * 0.03 : Math.abs(first) * 0.05 || 1;
  const scale = linearScale([first - room, last + room], range);
  const ticks = labelTicks(roundTicks(first - room, last + room, count)).map(({ value, label }) => ({
    at: scale.at(value),
    label,
  }));
  return { at: (value) => scale.at(shown(value)), valueAt: (px) => hidden(scale.valueAt(px)), range, ticks };
}

/** An axis of temperatures in K, labelled in the chosen unit. */
export const createTemperatureScale = (
  valuesK: readonly number[],
  range: [number, number],
  units: Units,
  count = Math.max(2, Math.round(Math.abs(range[1] - range[0]) / 90)),
): PlotScale =>
  createPlotScale(valuesK, range, {
    count,
    ...(units.temperature === '°C' && { shown: celsiusFromKelvin, hidden: kelvinFromCelsius }),
  });

const HOLD_TIME = 'Time from the start of the hold';

/** Units of a time axis, from the span in s from which each is chosen. */
const TIME_UNITS = [
  { unit: 'h', seconds: 3600, from: 6 * 3600 },
  { unit: 'min', seconds: 60, from: 600 },
  { unit: 's', seconds: 1, from: 0 },
];

/** An axis of times in s, labelled in a unit that fits them. */
export function createTimeScale(valuesS: readonly number[], range: [number, number]): PlotScale & { unit: string } {
  const longest = Math.max(0, ...valuesS);
  const { unit, seconds } = TIME_UNITS.find(({ from }) => longest >= from) ?? TIME_UNITS[2];
  const count = Math.max(2, Math.round(Math.abs(range[1] - range[0]) / 90));
  const scale = createPlotScale(valuesS, range, {
    count,
    shown: (value) => value / seconds,
    hidden: (value) => value * seconds,
  });
  return { ...scale, unit };
}

/** Axis of a thermogram: temperature, or time for a hold. */
export function createLaneScale(
  lane: { holdK?: number } | undefined,
  values: readonly number[],
  range: [number, number],
  units: Units,
): { scale: PlotScale; label: string } {
  if (lane?.holdK === undefined)
    return { scale: createTemperatureScale(values, range, units), label: `Temperature, ${units.temperature}` };
  const scale = createTimeScale(values, range);
  return { scale, label: `${HOLD_TIME}, ${scale.unit}` };
}

/** Times that span less than this ratio stand on a linear axis. */
const LINEAR_TIMES = 5;

/** Axis of holds side by side, which last from seconds to days: on a logarithmic one each shows its event. */
export function createHoldsScale(
  timesS: readonly number[],
  range: [number, number],
): { scale: PlotScale; label: string } {
  const shortestS = Math.min(...timesS);
  const longestS = Math.max(...timesS);
  if (!(shortestS > 0 && longestS / shortestS > LINEAR_TIMES)) {
    const scale = createTimeScale(timesS, range);
    return { scale, label: `${HOLD_TIME}, ${scale.unit}` };
  }
  const { unit, seconds } = TIME_UNITS.find(({ from }) => longestS >= from) ?? TIME_UNITS[2];
  const { at, valueAt } = logScale([shortestS, longestS], range);
  const ticks: PlotScale['ticks'] = [];
  const [first, last] = [Math.log10(shortestS / seconds), Math.log10(longestS / seconds)];
  for (let exponent = Math.floor(first); exponent <= last; exponent++)
    for (const factor of last - first > 2.5 ? [1] : [1, 2, 5]) {
      const shown = factor * 10 ** exponent;
      if (shown * seconds < shortestS || shown * seconds > longestS) continue;
      ticks.push({ at: at(shown * seconds), label: formatFixed(shown, Math.max(0, -exponent)) });
    }
  const scale: PlotScale = { at, valueAt, range, ticks };
  return { scale, label: `${HOLD_TIME}, ${unit}, logarithmic` };
}

/** Equal steps with as many decimals as the step needs. */
export function labelTicks(values: readonly number[]): { value: number; label: string }[] {
  const step = values.length > 1 ? values[1] - values[0] : 1;
  const decimals = Math.max(0, -Math.floor(Math.log10(Math.abs(step)) + 1e-9));
  return values.map((value) => ({ value, label: formatFixed(value, decimals) }));
}

/** Lowest and highest finite number of several lists, as a list for `createPlotScale`. */
export function extent(...lists: readonly (readonly number[])[]): number[] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const list of lists)
    for (const value of list) {
      if (value < low) low = value;
      if (value > high) high = value;
    }
  return low <= high ? [low, high] : [];
}
