import fc from 'fast-check';
import { levenbergMarquardt } from 'ml-levenberg-marquardt';
import { describe, expect, test } from 'vitest';
import { studentQuantile } from '../../jobs/numeric/distributions.ts';
import { LeastSquares } from '../../jobs/numeric/least-squares.ts';
import { fitLine } from '../../jobs/numeric/line.ts';
import { solveSymmetric } from '../../jobs/numeric/linear-solve.ts';
import { fitLocalPolynomial } from '../../jobs/numeric/local-polynomial.ts';
import { createRandom } from '../../jobs/numeric/random.ts';
import { findRoot } from '../../jobs/numeric/root.ts';
import { mean, robustSigma, standardDeviation } from '../../jobs/numeric/statistics.ts';
import { validate } from '../validation/validate.ts';

describe('Student quantile', () => {
  // t(0.975, ν), NIST/SEMATECH e-Handbook of Statistical Methods, section 1.3.6.7.2, three decimals as printed there.
  test.each([
    [1, 12.706],
    [2, 4.303],
    [3, 3.182],
    [5, 2.571],
    [8, 2.306],
    [10, 2.228],
    [30, 2.042],
    [100, 1.984],
  ])('ν = %d', (degrees, t) => {
    const got = studentQuantile(0.975, degrees);
    const quantity = `t(0.975, ${degrees})`;
    validate({ method: 'quantiles', quantity, source: 'nistHandbook', expected: t, got, within: 5e-4 });
  });
  test('identities: ν = 1 is tan(π(p − ½)), ν = 2 in closed form', () => {
    for (const p of [0.6, 0.9, 0.975, 0.995]) {
      expect(studentQuantile(p, 1)).toBeCloseTo(Math.tan(Math.PI * (p - 0.5)), 8);
      expect(studentQuantile(p, 2)).toBeCloseTo((2 * p - 1) / Math.sqrt(2 * p * (1 - p)), 8);
    }
  });
});

describe('straight line', () => {
  // Norris data set of the NIST Statistical Reference Datasets (first twelve rows would not do: all 36), certified values below.
  const y = [0.1, 338.8, 118.1, 888.0, 9.2, 228.1, 668.5, 998.5, 449.1, 778.9, 559.2, 0.3, 0.1, 778.1, 668.8, 339.3, 448.9, 10.8, 557.7, 228.3, 998.0, 888.8, 119.6, 0.3, 0.6, 557.6, 339.3, 888.0, 998.5, 778.9, 10.2, 117.6, 228.9, 668.4, 449.2, 0.2]; // biome-ignore format: data
  const x = [0.2, 337.4, 118.2, 884.6, 10.1, 226.5, 666.3, 996.3, 448.6, 777.0, 558.2, 0.4, 0.6, 775.5, 666.9, 338.0, 447.5, 11.6, 556.0, 228.1, 995.8, 887.6, 120.2, 0.3, 0.3, 556.8, 339.1, 887.2, 999.0, 779.0, 11.1, 118.3, 229.2, 669.1, 448.9, 0.5]; // biome-ignore format: data
  test('NIST StRD Norris: certified slope, intercept and errors', () => {
    const line = fitLine(x, y);
    const check = (quantity: string, expected: number, got: number, within: number) =>
      validate({
        method: 'straight line',
        quantity: `Norris, ${quantity}`,
        source: 'nistReference',
        expected,
        got,
        within,
      });
    check('intercept', -0.262323073774029, line.intercept, 5e-12);
    check('slope', 1.00211681802045, line.slope, 5e-13);
    check('error of the intercept', 0.232818234301152, line.interceptError, 5e-12);
    check('error of the slope', 0.429796848199937e-3, line.slopeError, 5e-14);
    check('residual standard deviation', 0.884796396144373, line.scatter, 5e-12);
  });
  test('a weight of two is a row twice', () => {
    const once = fitLine([1, 2, 3, 4], [1, 3, 2, 5], [1, 2, 1, 1]);
    const twice = fitLine([1, 2, 2, 3, 4], [1, 3, 3, 2, 5]);
    expect(once.slope).toBeCloseTo(twice.slope, 12);
  });
  test('Lasocka lines Tg = A + B ln β as printed in doi 10.1016/j.jnoncrysol.2009.04.032 (β in K/min), within one unit of the last digit', () => {
    const lnRate = [10, 15, 20, 25, 30].map(Math.log);
    const printed: [number[], number, number][] = [
      [[517.9, 518.6, 522.3, 523.4, 525.1], 501.2, 6.9],
      [[434.3, 435.3, 437.1, 437.1, 438.0], 426.4, 3.4],
      [[502.0, 505.2, 507.6, 509.9, 511.0], 482.6, 8.37],
      [[432.5, 436.2, 437.1, 438.0, 439.0], 420.1, 5.61],
    ];
    for (const [Tg, A, B] of printed) {
      const line = fitLine(lnRate, Tg);
      const given = { method: 'straight line', source: 'seGePb' } as const;
      const named = (letter: string) => `Lasocka ${letter} of Tg ${Tg[0]} … ${Tg[4]} K`;
      validate({ ...given, quantity: named('A'), expected: A, got: line.intercept, within: 0.15 });
      validate({ ...given, quantity: named('B'), expected: B, got: line.slope, within: 0.015 });
    }
  });
});

describe('least squares', () => {
  // Misra1a of the NIST Statistical Reference Datasets: y = b1 (1 − exp(−b2 x)), certified values and errors, start 1.
  const y = [10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.4, 75.47, 81.78];
  const x = [77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0];
  const solver = new LeastSquares(14, 2, (p, r, J) => {
    for (let i = 0; i < 14; i++) {
      const e = Math.exp(-p[1] * x[i]);
      r[i] = p[0] * (1 - e) - y[i];
      J[2 * i] = 1 - e;
      J[2 * i + 1] = p[0] * x[i] * e;
    }
  });
  test.each([
    [500, 0.0001],
    [250, 0.0005],
  ])('NIST StRD Misra1a from start %d, %d to eight digits with its errors', (b1, b2) => {
    const fit = solver.solve(Float64Array.of(b1, b2), Float64Array.of(100, 1e-4), 200);
    expect(fit.converged).toBe(true);
    const check = (quantity: string, expected: number, got: number, relative: number) =>
      validate({
        method: 'least squares',
        quantity: `Misra1a from ${b1}, ${quantity}`,
        source: 'nistReference',
        expected,
        got,
        within: relative * expected,
      });
    check('b1', 2.3894212918e2, fit.parameters[0], 1e-8);
    check('b2', 5.5015643181e-4, fit.parameters[1], 1e-8);
    check('error of b1', 2.7070075241, Math.sqrt(fit.covariance![0]), 5e-8);
    check('error of b2', 7.2668688436e-6, Math.sqrt(fit.covariance![3]), 5e-8);
    check('residual sum of squares', 1.2455138894e-1, fit.sumOfSquares, 5e-9);
  });
  test('agrees with the Levenberg–Marquardt library', () => {
    const ours = solver.solve(Float64Array.of(250, 0.0005), Float64Array.of(100, 1e-4), 200);
    const library = levenbergMarquardt(
      { x, y },
      ([a, b]) =>
        (v) =>
          a * 100 * (1 - Math.exp(-b * 1e-3 * v)),
      {
        initialValues: [2.5, 0.5],
        maxIterations: 200,
        errorTolerance: 1e-14,
        gradientDifference: 1e-6,
      },
    );
    expect(Math.abs((library.parameterValues[0] * 100) / ours.parameters[0] - 1)).toBeLessThan(1e-5);
  });
  test('a parameter that nothing depends on ends with a reason, not a number alone', () => {
    const blind = new LeastSquares(3, 2, (p, r, J) => {
      for (let i = 0; i < 3; i++) {
        r[i] = p[0] - i;
        J[2 * i] = 1;
        J[2 * i + 1] = 0;
      }
    });
    const fit = blind.solve(Float64Array.of(0, 0), Float64Array.of(1, 1));
    expect(fit.converged).toBe(false);
    expect(fit.message).toMatch(/singular/);
  });
});

describe('small linear systems', () => {
  test('inverse × matrix is 1 for random positive definite matrices', () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: -3, max: 3, noNaN: true }), { minLength: 16, maxLength: 16 }), (a) => {
        const m = new Float64Array(16);
        for (let i = 0; i < 4; i++) {
          for (let j = 0; j < 4; j++) {
            for (let k = 0; k < 4; k++) m[i * 4 + j] += a[i * 4 + k] * a[j * 4 + k];
          }
          m[i * 4 + i] += 0.5;
        }
        const inverse = Float64Array.from(m);
        expect(solveSymmetric(inverse, new Float64Array(4), 4)).toBe(true);
        for (let i = 0; i < 4; i++) {
          for (let j = 0; j < 4; j++) {
            let s = 0;
            for (let k = 0; k < 4; k++) s += inverse[i * 4 + k] * m[k * 4 + j];
            expect(s).toBeCloseTo(i === j ? 1 : 0, 7);
          }
        }
      }),
      { numRuns: 50 },
    );
  });
});

describe('local polynomial', () => {
  // Savitzky & Golay 1964, Table I: quadratic/cubic smoothing over five points is (−3, 12, 17, 12, −3)/35.
  test('five even points give the published smoothing weights', () => {
    const x = Float64Array.of(0, 1, 2, 3, 4);
    const weights = [0, 1, 2, 3, 4].map((k) => {
      const y = new Float64Array(5);
      y[k] = 35;
      return fitLocalPolynomial(x, y, 2, 2, 2).value;
    });
    [-3, 12, 17, 12, -3].forEach((w, k) => {
      const quantity = `smoothing weight ${k + 1} of 5, × 35`;
      const got = weights[k];
      validate({ method: 'local polynomial', quantity, source: 'savitzkyGolay', expected: w, got, within: 5e-10 });
    });
  });
  test('a cubic comes back exactly from uneven points, with all derivatives', () => {
    const x = Float64Array.of(-2, -1.3, -0.2, 0.1, 0.9, 1.4, 2.2, 3);
    const y = x.map((v) => 1 + 2 * v - 3 * v * v + 0.5 * v ** 3);
    const f = fitLocalPolynomial(x, y, 0.5, 2, 3);
    expect(f.value).toBeCloseTo(1 + 1 - 0.75 + 0.0625, 9);
    expect(f.slope).toBeCloseTo(2 - 3 + 0.375, 9);
    expect(f.curvature).toBeCloseTo(-6 + 1.5, 8);
    expect(f.third).toBeCloseTo(3, 7);
  });
});

describe('root finding and random numbers', () => {
  test('Brent finds cos x = x (Dottie number, 0.739085133215160…)', () => {
    const got = findRoot((x) => Math.cos(x) - x, 0, 1);
    const expected = 0.7390851332151607;
    validate({ method: 'root', quantity: 'cos x = x', source: 'dottie', expected, got, within: 5e-13 });
  });
  test('no sign change is refused with both values', () => {
    expect(() => findRoot((x) => x * x + 1, -1, 1)).toThrow(/no sign change/);
  });
  test('equal seeds repeat, other seeds differ, moments are those of the distributions', () => {
    const a = createRandom('ab');
    const b = createRandom('ab');
    const c = createRandom('ac');
    expect(a.uniform()).toBe(b.uniform());
    expect(a.uniform()).not.toBe(c.uniform());
    const normal = Array.from({ length: 40000 }, () => a.normal());
    const uniform = Array.from({ length: 40000 }, () => a.uniform());
    expect(Math.abs(mean(normal))).toBeLessThan(0.02);
    expect(Math.abs(standardDeviation(normal) - 1)).toBeLessThan(0.02);
    expect(Math.abs(mean(uniform) - 0.5)).toBeLessThan(0.01);
    expect(robustSigma(normal)).toBeCloseTo(1, 1);
    const counts = new Array<number>(7).fill(0);
    for (let i = 0; i < 7000; i++) counts[a.integer(7)]++;
    for (const n of counts) expect(Math.abs(n - 1000)).toBeLessThan(150);
  });
});
