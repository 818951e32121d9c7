import { expect, test } from 'vitest';
import { averageWindow, flickerOf } from '../../jobs/reduction/window.ts';
import { seededRandom } from '../study/generator/index.ts';
import { pinkNoise } from '../study/generator/recording.ts';

const ROWS = 1200;
const time = Float64Array.from({ length: ROWS }, (_, i) => i);

/** The mean over four seeds: 80 rows a width, an event's place from row 560 to 640 left out. */
function meanFlicker(made: (random: ReturnType<typeof seededRandom>) => Float64Array): number {
  const found = [1, 2, 3, 4].map((seed) =>
    flickerOf(averageWindow(time, time, made(seededRandom(`flicker/${seed}`)), 0, ROWS, 80, 1), 80, 560, 640),
  );
  return found.reduce((a, b) => a + b, 0) / found.length;
}

test('white noise has none but what chance makes of a few blocks; a parabola adds nothing', () => {
  const white = (random: ReturnType<typeof seededRandom>) => time.map((t) => random.normal() + 1e-5 * t * t);
  expect(meanFlicker(white)).toBeLessThan(0.1);
});

test('1/f noise does not average out over parts of a width', () => {
  const both = (random: ReturnType<typeof seededRandom>) => {
    const pink = pinkNoise(ROWS, random.fork('pink'));
    return time.map((_, i) => random.normal() + pink[i]);
  };
  expect(meanFlicker(both)).toBeGreaterThan(0.2);
  expect(meanFlicker(both)).toBeLessThan(0.5);
});
