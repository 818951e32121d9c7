import { scaleLinear, scaleLog } from 'd3-scale';
import fc from 'fast-check';
import { expect, test } from 'vitest';
import { linearScale, logScale, roundTicks } from '../../web/charts/scales.ts';

// Outside source of every number here: d3-scale 4, a library of scales in wide use.
const size = fc.integer({ min: -1e6, max: 1e6 }).map((n) => n / 64);
const width = fc.integer({ min: 1, max: 1e6 }).map((n) => n / 64);

test('places numbers as the library does', () => {
  fc.assert(
    fc.property(size, width, size, (low, wide, value) => {
      const [ours, theirs] = [linearScale([low, low + wide], [40, 700]), scaleLinear([low, low + wide], [40, 700])];
      const scale = Math.abs(theirs(value)) + 700;
      expect(Math.abs(ours.at(value) - theirs(value)) / scale).toBeLessThan(1e-9);
      expect(Math.abs(ours.valueAt(300) - theirs.invert(300))).toBeLessThan(1e-9 * (Math.abs(low) + wide));
    }),
  );
  const [ours, theirs] = [logScale([0.02, 3e4], [40, 700]), scaleLog([0.02, 3e4], [40, 700])];
  for (const rate of [0.005, 0.02, 1, 37, 3e4]) expect(ours.at(rate)).toBeCloseTo(theirs(rate), 9);
  expect(ours.valueAt(300)).toBeCloseTo(theirs.invert(300), 9);
});

test('a single number stands in the middle', () => {
  expect(linearScale([5, 5], [40, 700]).at(5)).toBe(scaleLinear([5, 5], [40, 700])(5));
  expect(roundTicks(5, 5, 4)).toEqual(scaleLinear([5, 5], [0, 1]).ticks(4));
});

test('marks the same round numbers', () => {
  fc.assert(
    fc.property(size, width, fc.integer({ min: 1, max: 12 }), (low, wide, count) => {
      expect(roundTicks(low, low + wide, count)).toEqual(scaleLinear([low, low + wide], [0, 1]).ticks(count));
    }),
  );
});
