import type { ForecastQuestion } from '../../schema/wire/forecasts.ts';
import { kelvinFromCelsius } from '../../schema/wire/units.ts';
import { checkProgramme } from './programme.ts';

/** A question as the API's body and the command line put it. */
export interface ForecastRequest {
  temperature_C?: number;
  conversion?: number;
  time_s?: number;
  /** [time in s, temperature in °C], times rising */
  program?: readonly (readonly [number, number])[];
}

const FORMS =
  '{temperature_C, conversion}, {temperature_C, time_s}, {program, conversion}, {program} or {time_s, conversion}';
/** Rows of a programme that a request may bring; longer ones belong into programs/*.csv. */
export const MOST_PROGRAM_ROWS = 1000;

/**
 * The one question that a request asks. @throws RangeError for any other set of fields than the five, for values out of range and for a programme whose
 * times do not rise, quoting what was given
 */
export function questionOf(request: ForecastRequest, name = ''): ForecastQuestion {
  const { temperature_C, conversion, time_s, program } = request;
  const given = (['temperature_C', 'conversion', 'time_s', 'program'] as const).filter((k) => request[k] !== undefined);
  if (program !== undefined) {
    if (temperature_C !== undefined || time_s !== undefined)
      throw new RangeError(`not one of ${FORMS}: ${given.join(', ')}`);
    if (program.length > MOST_PROGRAM_ROWS)
      throw new RangeError(
        `a programme in a request has at most ${MOST_PROGRAM_ROWS} rows; this one has ${program.length}`,
      );
    const programme = {
      name,
      timeS: Float64Array.from(program, (row) => row[0]),
      temperatureK: Float64Array.from(program, (row) => kelvinFromCelsius(row[1])),
    };
    checkProgramme(programme);
    return conversion === undefined
      ? { question: 'conversion_at_end', programme }
      : { question: 'time_to_conversion', conversion, programme };
  }
  if (given.length === 2) {
    if (temperature_C === undefined) return { question: 'temperature_limit', conversion: conversion!, timeS: time_s! };
    const temperatureK = kelvinFromCelsius(temperature_C);
    return conversion === undefined
      ? { question: 'conversion_at_end', temperatureK, timeS: time_s! }
      : { question: 'time_to_conversion', conversion, temperatureK };
  }
  throw new RangeError(`not one of ${FORMS}: ${given.length > 0 ? given.join(', ') : 'nothing given'}`);
}
