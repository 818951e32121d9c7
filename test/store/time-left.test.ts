import { expect, test } from 'vitest';
import { secondsLeft } from '../../jobs/store/time-left.ts';

// Work over pace is time: the numbers are worked out by hand.
test('every step counts at its own pace, side by side where jobs run so', () => {
  const paces = [
    { step: 'read-scan' as const, meanMs: 100, atOnce: 2 },
    { step: 'fit-sample' as const, meanMs: 2000, atOnce: 1 },
  ];
  expect(secondsLeft({ 'read-scan': 10, 'fit-sample': 3 }, paces)).toBeCloseTo(0.5 + 6, 9);
  expect(secondsLeft({ 'read-scan': 1 }, paces)).toBeCloseTo(0.1, 9);
  expect(secondsLeft({}, paces)).toBe(0);
});

test('a step of which none has ended is not left out, and slows with the others', () => {
  const after = (meanMs: number) =>
    secondsLeft({ 'judge-curvature': 4 }, [{ step: 'fit-sample', meanMs, atOnce: 1 }]) ?? Number.NaN;
  expect(after(800)).toBeGreaterThan(0.5);
  expect(after(1600)).toBeCloseTo(2 * after(800), 9);
});

test('nothing is said before any job has ended', () => {
  expect(secondsLeft({ 'read-scan': 10 }, [])).toBeNull();
});
