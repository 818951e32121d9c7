import type { ForecastRow, ForecastSource, GoalRow, ProgrammeTable } from '../../schema/wire/forecasts.ts';
import { kelvinFromCelsius } from '../../schema/wire/units.ts';
import { createForecaster } from './answer.ts';

/** Conversions that a sample without a goal is forecast for. */
const STANDARD_CONVERSIONS: readonly number[] = [0.01, 0.5];

/**
 * The rows of forecasts.csv of one event, in fixed order: its goals in the order given, then the programmes by name, and without a goal the
 * times to α = 0.01 and 0.5 at five temperatures. Goals of other samples are passed over.
 */
export function forecastTable(
  source: ForecastSource,
  goals: readonly GoalRow[],
  programmes: readonly ProgrammeTable[],
): ForecastRow[] {
  const ask = createForecaster(source);
  const own = goals.filter((g) => g.sample === source.sample);
  const sorted = [...programmes].sort((a, b) => (a.name < b.name ? -1 : a.name > b.name ? 1 : 0));
  const rows = own.flatMap((goal) => answerGoal(ask, goal, sorted));
  const asked = own.some((g) => g.temperatureK === undefined && g.timeS === undefined);
  if (!asked) for (const programme of sorted) rows.push(...ask({ question: 'conversion_at_end', programme }));
  if (own.length > 0) return rows;
  for (const temperatureK of standardTemperatures(source))
    for (const conversion of STANDARD_CONVERSIONS)
      rows.push(...ask({ question: 'time_to_conversion', conversion, temperatureK }));
  return rows;
}

/** A goal asks for what it leaves out; with conversion, temperature and time the time to the conversion is held against the time wanted. */
function answerGoal(
  ask: ReturnType<typeof createForecaster>,
  { conversion, temperatureK, timeS }: GoalRow,
  programmes: readonly ProgrammeTable[],
): ForecastRow[] {
  if (conversion !== undefined && temperatureK !== undefined)
    return ask({ question: 'time_to_conversion', conversion, temperatureK }, timeS === undefined ? {} : { timeS });
  if (conversion !== undefined && timeS !== undefined) return ask({ question: 'temperature_limit', conversion, timeS });
  if (temperatureK !== undefined && timeS !== undefined)
    return ask({ question: 'conversion_at_end', temperatureK, timeS });
  if (conversion === undefined) return [];
  return programmes.flatMap((programme) => ask({ question: 'conversion_at_end', programme }, { conversion }));
}

/** Five temperatures, in whole °C: 50 and 25 K below the lowest measured, that one, the middle and the highest. */
export function standardTemperatures({ lowestMeasuredK, highestMeasuredK }: ForecastSource): number[] {
  const wanted = [
    lowestMeasuredK - 50,
    lowestMeasuredK - 25,
    lowestMeasuredK,
    (lowestMeasuredK + highestMeasuredK) / 2,
    highestMeasuredK,
  ];
  const celsius = wanted.map((T, i) => (i < 3 ? Math.ceil(T - 273.15) : Math.floor(T - 273.15)));
  return celsius.map(kelvinFromCelsius);
}
