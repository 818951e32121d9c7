import type { ForecastRow, ForecastSource } from '../../schema/wire/forecasts.ts';
import { celsiusFromKelvin } from '../../schema/wire/units.ts';

const short = (x: number): string => String(Number(x.toPrecision(3)));
/** Julian year, s (IAU). */
const YEAR_S = 31_557_600;

/** A time in the unit a person would say. */
export function timeText(seconds: number): string {
  const units: [number, string][] = [
    [YEAR_S, 'years'],
    [86_400, 'days'],
    [3600, 'h'],
    [60, 'min'],
    [1, 's'],
    [1e-3, 'ms'],
  ];
  const [size, unit] = units.find(([s]) => seconds >= 2 * s) ?? [1e-6, 'µs'];
  return `${short(seconds / size)} ${unit}`;
}

/** One sentence or two a forecast: the pessimistic end first, then how far from the data it lies and what stands against it. */
export function describeForecast(row: ForecastRow, source: ForecastSource, frozen: boolean): string {
  const parts: string[] = [];
  const { value, lower95, upper95 } = row;
  const say = (x: number) => (row.unit === 's' ? timeText(x) : row.unit === '°C' ? `${x.toFixed(1)} °C` : short(x));
  if (value === null) parts.push(notReached(row, lower95 === null ? undefined : say(lower95)));
  else if (row.question === 'conversion_at_end')
    parts.push(
      `At most ${say(upper95 ?? value)}, most likely ${say(value)}${lower95 === null ? '' : `, at least ${say(lower95)}`}.`,
    );
  else
    parts.push(
      `At least ${say(lower95 ?? value)}, most likely ${say(value)}${upper95 === null ? '' : `, at most ${say(upper95)}`}.`,
    );
  if (frozen)
    parts.push(
      `Below ${celsiusFromKelvin(source.law?.frozenBelowK ?? source.lowestMeasuredK).toFixed(0)} °C the local energy is held and the pessimistic end is the straight Arrhenius law.`,
    );
  if (row.beyond_measured_K > 0)
    parts.push(
      `${short(row.beyond_measured_K)} K (${short(row.beyond_measured_decades)} decades of rate) outside the measured ${celsiusFromKelvin(source.lowestMeasuredK).toFixed(0)} to ${celsiusFromKelvin(source.highestMeasuredK).toFixed(0)} °C.`,
    );
  if (row.flags.includes('crosses-glass-transition') && source.glassTransitionK !== undefined)
    parts.push(
      `The glass transition at ${celsiusFromKelvin(source.glassTransitionK).toFixed(0)} °C lies between it and the data.`,
    );
  if (source.solventFraction !== undefined && source.glassTransitionK !== undefined && row.temperature_C !== null)
    parts.push(
      `T − Tg(w) is ${(row.temperature_C - celsiusFromKelvin(source.glassTransitionK)).toFixed(1)} K, the solvent fraction w ${source.solventFraction}.`,
    );
  if (row.flags.includes('forecast-straight'))
    parts.push('The law of the material bends, and this method carries a mean energy straight on.');
  if (row.flags.includes('forecasts-disagree'))
    parts.push('The two methods differ by more than a factor of 3 in time.');
  if (row.flags.includes('driving-force-ignored'))
    parts.push('Without melting data the driving force counts as full: near melting the true times are longer.');
  return parts.join(' ');
}

function notReached(row: ForecastRow, lower: string | undefined): string {
  if (row.question === 'temperature_limit')
    return 'No temperature below melting brings this conversion within the time.';
  const when = lower === undefined ? '' : ` (the pessimistic end of the band reaches it after ${lower})`;
  return row.program === ''
    ? 'The conversion is not reached.'
    : `The conversion is not reached within the programme${when}.`;
}
