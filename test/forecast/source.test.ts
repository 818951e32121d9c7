import { expect, test } from 'vitest';
import { answerQuestion, makeForecastSource } from '../../jobs/forecast/index.ts';
import { decodeForecastSource, encodeForecastSource } from '../../schema/wire/forecast-blob.ts';
import { LAW, sourceOf } from './sources.ts';

const question = { question: 'time_to_conversion', conversion: 0.3, temperatureK: 610 } as const;

test('a source comes back from its blob and answers the same, draw for draw', () => {
  const source = sourceOf(
    LAW,
    {},
    { melting: { meltingK: 900, enthalpyJPerMol: 2e4 }, glassTransitionK: 590, modelFreeDegreesOfFreedom: 5 },
  );
  const back = decodeForecastSource(encodeForecastSource(source));
  expect(back).toEqual(source);
  expect(answerQuestion(back, question)).toEqual(answerQuestion(source, question));
});

test('each method alone, or none', () => {
  const { law, lawDraws, modelFree, modelFreeDraws } = sourceOf(LAW);
  const parts = {
    sample: 'glass-a',
    event: 1,
    facts: { meltingK: 900, meltingEnthalpyJPerKg: 2e5, molarMassKgPerMol: 0.1 },
  };
  const shared = makeForecastSource({
    ...parts,
    shared: { law: law!, draws: lawDraws!, degreesOfFreedom: 7, verdict: 'material' },
  })!;
  expect(shared.melting).toEqual({ meltingK: 900, enthalpyJPerMol: 2e4 });
  expect(decodeForecastSource(encodeForecastSource(shared))).toEqual(shared);
  expect(answerQuestion(shared, question).map((r) => r.method)).toEqual(['shared_law']);
  const free = makeForecastSource({
    ...parts,
    modelFree: { curve: modelFree!, draws: modelFreeDraws!, degreesOfFreedom: 6, lowestK: 620, highestK: 680 },
  })!;
  expect(answerQuestion(free, question).map((r) => r.method)).toEqual(['model_free']);
  expect(free).toMatchObject({ degreesOfFreedom: 6, lowestMeasuredK: 620, highestMeasuredK: 680 });
  expect(makeForecastSource(parts)).toBeUndefined();
});

test('a shared law with draws of one event answers 400 draws of both methods in little work', () => {
  const source = sourceOf(LAW, { draws: 400 });
  const started = process.cpuUsage();
  answerQuestion(source, { question: 'temperature_limit', conversion: 0.01, timeS: 1e7 });
  // µs of work, not of waiting.
  expect(process.cpuUsage(started).user).toBeLessThan(400_000);
});
