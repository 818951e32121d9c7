import { expect, test } from 'vitest';
import { tryForecast, tryHold } from './forecast.ts';
import { tryAdvice } from './forecast-advice.ts';

// The small version of `npm run study -- forecast` and `forecast-advice`, which run 200 and 100 campaigns a row. Truth: the independent generator.

test('most bands of the shared law hold the truth 20 to 80 K outside the data; a model-free one that misses is flagged', () => {
  const trials = ['straight', 'bent', 'bent-glass'].flatMap((kind) =>
    ['a'].map((seed) => tryForecast(seed, kind as 'straight', 30)!),
  );
  // Of three at 95 %, fewer than two is a chance of 1 in 140.
  expect(trials.filter((t) => t.sharedHolds).length).toBeGreaterThanOrEqual(2);
  for (const t of trials) {
    expect(Math.abs(t.sharedLnError)).toBeLessThan(0.7);
    if (!t.free!.holds) expect(t.free!.flags).toContain('extrapolates');
    if (t.kind !== 'straight') expect(t.free!.flags).toContain('forecast-straight');
  }
});

test('a simulated hold comes within 10 % in time, by both methods', () => {
  const { shared, free } = tryHold('1/0')!;
  expect(Math.abs(shared)).toBeLessThan(0.1);
  expect(Math.abs(free)).toBeLessThan(0.1);
});

test.each([
  ['energy', 'few'],
  ['bend', 'full'],
] as const)('advice on %s: the first suggestion beats the median candidate and narrows as it said', (goal, setting) => {
  const trial = tryAdvice('1/1', goal, setting)!;
  expect(trial.topAgainstMedian).toBeLessThanOrEqual(1);
  expect(Math.abs(trial.predicted - 1)).toBeLessThan(0.25);
});
