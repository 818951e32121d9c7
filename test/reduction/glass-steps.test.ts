import { expect, test } from 'vitest';
import { jumpAt, refineStep } from '../../jobs/reduction/glass-transition.ts';
import { findLocalStep } from '../../jobs/reduction/local-steps.ts';
import { seededRandom } from '../study/generator/index.ts';

const ROWS = 1500;
const NOISE = 0.01;
const SCALES = [8, 12, 18, 27, 40];
const time = Float64Array.from({ length: ROWS }, (_, i) => i);
const step = (t: number, middle: number, scale: number) => 1 / (1 + Math.exp((middle - t) / scale));

/** Exotherm up, so that steps of a glass go down; a hump at the end bends the baseline. */
function look(signal: (t: number) => number) {
  const random = seededRandom('glass steps');
  const y = time.map((t) => signal(t) + NOISE * random.normal());
  return { y, ...findLocalStep(time, y, 0, ROWS, NOISE, SCALES, false) };
}

test('a step between parallel lines is found beside a hump of the baseline', () => {
  const { y, step: found } = look((t) => -step(t, 500, 20) + 2 * Math.exp(-(((t - 1300) / 150) ** 2)));
  if (!found) throw new Error('no step');
  const { midpointS, step: height } = refineStep(time, y, NOISE, found);
  expect(Math.abs(midpointS - 500)).toBeLessThan(5);
  expect(Math.abs(height + 1)).toBeLessThan(0.15);
});

test('the same step the other way round is none', () => {
  const { step: found, doubtful } = look((t) => step(t, 500, 20));
  expect(found).toBeUndefined();
  expect(doubtful).toEqual([]);
});

test('a jump between two rows is told from a step that rows resolve', () => {
  const random = seededRandom('jump');
  const noisy = (signal: (t: number) => number) => time.map((t) => signal(t) + NOISE * random.normal());
  const seen = { middleS: 500, scaleS: 8, height: 1, ratio: 0.5, fromS: 450, toS: 550 };
  const jump = noisy((t) => (t < 500 ? 0 : -1));
  const at = jumpAt(time, jump, [0, ROWS], NOISE, refineStep(time, jump, NOISE, seen));
  expect(at?.row).toBe(500);
  expect(at?.height).toBeCloseTo(-1, 1);
  const smooth = noisy((t) => -step(t, 500, 8));
  expect(jumpAt(time, smooth, [0, ROWS], NOISE, refineStep(time, smooth, NOISE, seen))).toBeUndefined();
});

test('two steps of like height are both told and none is chosen', () => {
  const { step: found, doubtful, why } = look((t) => -step(t, 400, 20) - step(t, 1000, 20));
  expect(found).toBeUndefined();
  expect(why).toBe('alike');
  expect(doubtful.map((s) => Math.round(s.middleS / 50) * 50).sort((a, b) => a - b)).toEqual([400, 1000]);
});

test('a step no higher than its drift is told and not chosen', () => {
  const { step: found, doubtful, why } = look((t) => -step(t, 700, 20) - 0.02 * t);
  expect(found).toBeUndefined();
  expect(why).toBe('drift');
  expect(Math.abs(doubtful[0].middleS - 700)).toBeLessThan(20);
});
