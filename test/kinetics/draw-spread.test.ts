import { describe, expect, test } from 'vitest';
import { squaredHalfWidth, studentFactor } from '../../jobs/kinetics/draw-spread.ts';
import { studentCumulative } from '../../jobs/numeric/distributions.ts';
import { seededRandom } from '../study/generator/index.ts';

describe('half widths from parts of a variance', () => {
  // t(0.975) as tabulated in any handbook of statistics (from memory; SciPy 1.17 agrees).
  test.each([
    [1, 12.706],
    [2, 4.303],
    [5, 2.571],
    [30, 2.042],
    [Number.POSITIVE_INFINITY, 1.96],
  ])('one part with %d degrees of freedom: t = %d', (degrees, t) => {
    expect(Math.sqrt(squaredHalfWidth([1], [degrees]))).toBeCloseTo(t, 3);
    expect(studentFactor(degrees)).toBeCloseTo(t, 3);
  });
  test('between the degrees of the table too', () => {
    for (const nu of [1.07, 1.5, 2.6, 13.3, 400])
      expect(studentCumulative(studentFactor(nu), nu)).toBeCloseTo(0.975, 6);
  });
  test('nothing varies: no width', () => {
    expect(squaredHalfWidth([0, 0], [3, Number.POSITIVE_INFINITY])).toBe(0);
  });
  // Known truth: one part of variance 1 is given, the other of variance r² is estimated with ν degrees of freedom.
  test.each([
    [2, 0.5],
    [2, 1],
    [2, 2],
    [4, 1],
    [8, 1],
  ])('%d degrees, ratio %d: 20 000 intervals hold the truth in 93–97 %%', (degrees, ratio) => {
    const random = seededRandom(`half-widths/${degrees}/${ratio}`);
    let held = 0;
    for (let i = 0; i < 20000; i++) {
      let chi = 0;
      for (let k = 0; k < degrees; k++) chi += random.normal() ** 2;
      const error = random.normal() + ratio * random.normal();
      if (error ** 2 < squaredHalfWidth([(ratio ** 2 * chi) / degrees, 1], [degrees, Number.POSITIVE_INFINITY])) held++;
    }
    expect(held / 20000).toBeGreaterThan(0.93);
    expect(held / 20000).toBeLessThan(0.97);
  });
});
