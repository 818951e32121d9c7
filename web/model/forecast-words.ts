import type { FlagCode } from '../../schema/wire/flags.ts';
import type { ForecastRow } from '../../schema/wire/forecasts.ts';
import { kelvinFromCelsius } from '../../schema/wire/units.ts';
import { formatSignificant, formatTemperature, type Units } from '../format.ts';
import { flagMeaning, sentence } from '../words.ts';

/** Seconds of each unit of time, the longest first; a year of 365.25 days. */
const TIME_UNITS: readonly [number, string][] = [
  [31_557_600, 'a'],
  [86_400, 'd'],
  [3_600, 'h'],
  [60, 'min'],
  [1, 's'],
  [1e-3, 'ms'],
  [1e-6, 'µs'],
];

/** A time in the largest unit of which there are at least two. */
export function formatTime(seconds: number): string {
  const [size, name] = TIME_UNITS.find(([s]) => seconds >= 2 * s) ?? TIME_UNITS.at(-1)!;
  const count = seconds / size;
  return count >= 1e5
    ? `${count.toExponential(1).replace('e+', ' × 10^')}\u00a0${name}`
    : `${formatSignificant(count)}\u00a0${name}`;
}

function formatAnswer(value: number, unit: ForecastRow['unit'], units: Units): string {
  if (unit === 's') return formatTime(value);
  return unit === '°C' ? formatTemperature(kelvinFromCelsius(value), units) : formatSignificant(value);
}

export interface ForecastWords {
  question: string;
  answer: string;
  /** 95 % band, empty where there is none */
  band: string;
  method: string;
  /** The answer as a sentence, whether it meets its goal, and what is in doubt */
  words: string;
}

/** Lines of two numbers, time in s and temperature in °C; anything else on a line is refused by the server, which names the rule. */
export const parseProgramme = (text: string): [number, number][] =>
  text
    .split(/\r?\n/)
    .filter((line) => line.trim() !== '')
    .map((line) => {
      const [time, temperature] = line.trim().split(/[\s;,]+/);
      return [Number(time), Number(temperature)];
    });

const GOALS: Record<ForecastRow['goal'], string> = {
  met: 'The goal is met.',
  not_met: 'The goal is not met.',
  cannot_say: 'Whether the goal is met cannot be said.',
  '': '',
};

/** Doubts that the answer in words tells already where these words stand in it. */
const TOLD_AS: Partial<Record<FlagCode, RegExp>> = {
  extrapolates: /outside the measured/,
  'forecasts-disagree': /methods differ/,
  'forecast-straight': /straight on/,
};

/** One row of the forecasts in words. */
export function describeForecast(row: ForecastRow, units: Units): ForecastWords {
  const at =
    row.temperature_C === null
      ? `along ${row.program || 'the programme'}`
      : `at ${formatTemperature(kelvinFromCelsius(row.temperature_C), units)}`;
  const conversion = row.conversion === null ? '' : `α = ${formatSignificant(row.conversion)}`;
  const time = row.time_s === null ? '' : formatTime(row.time_s);
  const question = {
    time_to_conversion: `time to ${conversion} ${at}`,
    conversion_at_end: row.time_s === null ? `α at the end ${at}` : `α after ${time} ${at}`,
    temperature_limit: `highest temperature that keeps α below ${conversion.replace('α = ', '')} for ${time}`,
  }[row.question];
  const show = (value: number | null): string => (value === null ? '–' : formatAnswer(value, row.unit, units));
  return {
    question,
    answer: show(row.value),
    band: row.lower95 === null && row.upper95 === null ? '' : `${show(row.lower95)} to ${show(row.upper95)}`,
    method: row.method === 'model_free' ? 'model-free' : 'shared law',
    words: [
      sentence(row.detail),
      GOALS[row.goal],
      ...row.flags.filter((code) => !TOLD_AS[code]?.test(row.detail)).map((code) => `${sentence(flagMeaning(code))}.`),
    ]
      .filter(Boolean)
      .join(' '),
  };
}
