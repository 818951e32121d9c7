import { z } from '@hono/zod-openapi';
import type { ForecastQuestion, GoalRow } from '../../schema/wire/forecasts.ts';
import { kelvinFromCelsius } from '../../schema/wire/units.ts';
import { strict, textOf } from '../openapi.ts';
import { ROW_SHAPES } from './rows.ts';

/** Rows of a temperature programme in a question. */
const PROGRAM_ROWS = 20_000;
const GOALS = 1_000;

const conversionError = 'a conversion between 0 and 1';
const temperatureError = 'a temperature above −273.15 °C';
const timeError = 'a time above 0, s';
const programError = `2 to ${PROGRAM_ROWS} pairs of time in s, rising, and temperature in °C`;

const conversion = z
  .number({ error: conversionError })
  .gt(0, { error: conversionError })
  .lt(1, { error: conversionError });
const temperature = z.number({ error: temperatureError }).gt(-273.15, { error: temperatureError });
const time = z.number({ error: timeError }).gt(0, { error: timeError });
const program = z
  .array(z.tuple([z.number({ error: programError }), temperature], { error: programError }), { error: programError })
  .min(2, { error: programError })
  .max(PROGRAM_ROWS, { error: programError })
  .refine((rows) => rows.every(([t], i) => i === 0 || t > rows[i - 1][0]), { error: programError });

/** What a question gives says what it asks. */
export const QuestionBody = strict({
  conversion: conversion.optional(),
  temperature_C: temperature.optional(),
  time_s: time.optional(),
  program: program.optional(),
}).openapi('ForecastQuestion', {
  description:
    'Exactly one of {temperature_C, conversion}, {temperature_C, time_s}, {program, conversion}, {program}, {time_s, conversion}.',
});
type QuestionBody = z.infer<typeof QuestionBody>;

export const QUESTION_FORMS =
  'exactly one of {temperature_C, conversion}, {temperature_C, time_s}, {program, conversion}, {program}, {time_s, conversion}';

/** The question of a body, or undefined where it is none of the five. */
export function questionOf(body: QuestionBody): ForecastQuestion | undefined {
  const { conversion, temperature_C, time_s } = body;
  const programme = body.program && {
    name: '',
    timeS: Float64Array.from(body.program, ([t]) => t),
    temperatureK: Float64Array.from(body.program, ([, celsius]) => kelvinFromCelsius(celsius)),
  };
  const given = ['temperature_C', 'time_s', 'program', 'conversion'].filter(
    (k) => body[k as keyof QuestionBody] !== undefined,
  );
  const temperatureK = temperature_C === undefined ? 0 : kelvinFromCelsius(temperature_C);
  switch (given.join()) {
    case 'temperature_C,conversion':
      return { question: 'time_to_conversion', conversion: conversion!, temperatureK };
    case 'temperature_C,time_s':
      return { question: 'conversion_at_end', temperatureK, timeS: time_s! };
    case 'program,conversion':
      return { question: 'time_to_conversion', conversion: conversion!, programme: programme! };
    case 'program':
      return { question: 'conversion_at_end', programme: programme! };
    case 'time_s,conversion':
      return { question: 'temperature_limit', conversion: conversion!, timeS: time_s! };
    default:
      return undefined;
  }
}

export const AnswerShape = z
  .object({
    items: z.array(ROW_SHAPES.forecasts).openapi({ description: 'One row an event and method.' }),
    caution: z.string().openapi({ description: 'Stands on every forecast.' }),
  })
  .openapi('ForecastAnswer');

const goalError = 'two or three of conversion, temperature_C and time_s, or a conversion alone';

export const GoalShape = strict({
  sample: textOf(200),
  conversion: conversion.optional(),
  temperature_C: temperature.optional(),
  time_s: time.optional(),
})
  .refine(
    ({ conversion, temperature_C, time_s }) =>
      conversion !== undefined || (temperature_C !== undefined && time_s !== undefined),
    { error: goalError },
  )
  .openapi('Goal', {
    description:
      'A question of the campaign, as a row of goal.csv: what it leaves out is what is asked for. A conversion alone is asked of every programme.',
  });

const goalsError = `at most ${GOALS} goals`;
export const GoalsShape = z.array(GoalShape, { error: goalsError }).max(GOALS, { error: goalsError });

export const goalRowOf = ({ sample, conversion, temperature_C, time_s }: z.infer<typeof GoalShape>): GoalRow => ({
  sample,
  ...(conversion !== undefined && { conversion }),
  ...(temperature_C !== undefined && { temperatureK: kelvinFromCelsius(temperature_C) }),
  ...(time_s !== undefined && { timeS: time_s }),
});
