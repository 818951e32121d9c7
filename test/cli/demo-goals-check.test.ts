import { expect, test } from 'vitest';
import { compareGoals } from '../../jobs/cli/demo-goals-check.ts';
import type { GoalTruth } from '../../jobs/simulate/index.ts';

const goal: GoalTruth = {
  sample: 'glass',
  sentence: 'a goal',
  question: 'time_to_conversion',
  conversion: 0.01,
  temperatureC: 40,
  timeS: 3600,
  value: 7200,
  answer: 'met',
};
const row = {
  sample: 'glass',
  method: 'shared_law',
  question: 'time_to_conversion',
  conversion: 0.01,
  temperature_C: 40,
  program: '',
  time_s: 3600,
  value: 7000,
  lower95: 6500,
  upper95: 7500,
  goal: 'met',
};
const failures = (changed: object) => compareGoals([goal], [{ ...row, ...changed }]).failures;

test('a goal answered as its law has it: no failure, with band and truth', () => {
  const { text, failures: none } = compareGoals([goal], [row]);
  expect(none).toEqual([]);
  expect(text).toContain('117 min [108 min, 2.08 h]');
  for (const line of text.split('\n')) expect(line.length).toBeLessThanOrEqual(100);
});

test('to say that it cannot be said is no failure; a band that misses, a wrong answer and no forecast are', () => {
  expect(failures({ goal: 'cannot_say' })).toEqual([]);
  expect(failures({ goal: 'not_met' })).toEqual(['glass: a goal: answered not met, but it is met']);
  expect(failures({ goal: '' })).toEqual(['glass: a goal: answered nothing, but it is met']);
  expect(failures({ upper95: 7100 })).toEqual(['glass: a goal: the band does not hold the true 2 h']);
  expect(failures({ lower95: null })).toEqual(['glass: a goal: the band does not hold the true 2 h']);
  for (const other of [{ sample: 'other' }, { method: 'model_free' }, { temperature_C: 41 }, { program: 'a.csv' }])
    expect(failures(other)).toEqual(['glass: a goal: no forecast']);
});
