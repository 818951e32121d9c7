import { describe, expect, test } from 'vitest';
import { addStretch, fillRampIntegrals } from '../../jobs/laws/arrhenius-integral.ts';
import {
  temperatureIntegral,
  temperatureIntegralFactor,
  temperatureIntegralFactorFast,
} from '../../jobs/laws/temperature-integral.ts';
import { scaledExponentialIntegral } from '../../jobs/numeric/exponential-integral.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { validate } from '../validation/validate.ts';

// p(x) by mpmath 1.3.0 at 60 digits (table of the reference folder, temperature-integral/p_of_x_table.csv).
const P: [number, number][] = [
  [5, 1.992938085417676e-4],
  [5.5, 1.021233025822495e-4],
];
// −log10 p(x), same source, 12 digits.
const LOG_P: [number, number][] = [
  [5, 3.70050619331],
  [8, 5.36985642725],
  [10, 6.41677395981],
  [15, 8.91821749518],
  [20, 11.3276778254],
  [30, 16.0103026446],
  [40, 20.5966168809],
  [50, 25.1293873887],
  [60, 29.6279925881],
  [80, 38.5603361665],
  [100, 47.4379664292],
];
// E1(x), Abramowitz & Stegun 1964, Table 5.1, digits as printed there (from memory; mpmath agrees).
const E1: [number, number][] = [
  [0.5, 0.559773595],
  [1, 0.219383934],
  [1.5, 0.100019582],
  [2, 0.048900511],
];

describe('temperature integral', () => {
  test.each(P)('p(%d) to 1e-10 relative', (x, p) => {
    const got = temperatureIntegral(x);
    validate({
      method: 'temperature integral',
      quantity: `p(${x})`,
      source: 'mpmath',
      expected: p,
      got,
      within: 1e-10 * p,
    });
  });
  test.each(LOG_P)('−log10 p(%d) to its printed digits', (x, logP) => {
    validate({
      method: 'temperature integral',
      quantity: `−log10 p(${x})`,
      source: 'mpmath',
      expected: logP,
      got: -Math.log10(temperatureIntegral(x)),
      within: 6e-11 * Math.max(1, logP / 10),
    });
  });
  test.each(E1)('E1(%d) to its printed digits', (x, e1) => {
    const got = scaledExponentialIntegral(1, x) * Math.exp(-x);
    const quantity = `E1(${x})`;
    validate({
      method: 'temperature integral',
      quantity,
      source: 'abramowitzStegun',
      expected: e1,
      got,
      within: 6e-10,
    });
  });
  test('series and continued fraction meet at x = 1', () => {
    for (const n of [1, 2] as const) {
      expect(scaledExponentialIntegral(n, 1 - 1e-9)).toBeCloseTo(scaledExponentialIntegral(n, 1 + 1e-9), 8);
    }
  });
  test('the fast factor has the errors the reference table gives for the fourth-degree rational form', () => {
    // err_pct_SenumYang4 of the same table.
    for (const [x, percent] of [
      [8, -0.000326181],
      [10, -9.93078e-5],
      [15, -9.5774e-6],
      [20, -1.60394e-6],
    ]) {
      const error = 100 * (temperatureIntegralFactorFast(x) / temperatureIntegralFactor(x) - 1);
      validate({
        method: 'temperature integral',
        quantity: `error of the fast form at x = ${x}, %`,
        source: 'mpmath',
        expected: percent,
        got: error,
        within: 1e-3 * Math.abs(percent),
      });
    }
  });
  test('x ≤ 0 is refused with the value', () => {
    expect(() => scaledExponentialIntegral(1, -2)).toThrow(/-2/);
  });
});

describe('Arrhenius integral along a ramp', () => {
  /** Independent: composite Simpson with 20 000 steps on the integrand itself. */
  const simpson = (f: (t: number) => number, dt: number): number => {
    const n = 20000;
    let sum = f(0) + f(dt);
    for (let i = 1; i < n; i++) sum += (i % 2 ? 4 : 2) * f((i * dt) / n);
    return (sum * dt) / n / 3;
  };
  test.each([
    [150e3, 600, 640, 100],
    [300e3, 700, 702, 3],
    [80e3, 350, 300, 500], // cooling
    [200e3, 650, 650.01, 2], // short stretch
    [200e3, 650, 650, 60], // hold
  ])('value and derivatives for E = %d from %d to %d K in %d s', (E, T1, T2, dt) => {
    const x0 = 1 / ((T1 + T2) / 2);
    const out = { value: 0, byEnergy: 0, byEnergy2: 0 };
    addStretch(T1, T2, dt, E / GAS_CONSTANT, (x0 * E) / GAS_CONSTANT, out);
    const T = (t: number) => T1 + ((T2 - T1) * t) / dt;
    const k = (t: number) => Math.exp(-(E / GAS_CONSTANT) * (1 / T(t) - x0));
    const inverse = (t: number) => 1 / (GAS_CONSTANT * T(t));
    expect(Math.abs(out.value / simpson(k, dt) - 1)).toBeLessThan(1e-6);
    expect(Math.abs(out.byEnergy / simpson((t) => -k(t) * inverse(t), dt) - 1)).toBeLessThan(1e-6);
    expect(Math.abs(out.byEnergy2 / simpson((t) => k(t) * inverse(t) ** 2, dt) - 1)).toBeLessThan(1e-5);
  });
  test.each([
    [150e3, 300, 600, 640], // a start that does not matter
    [150e3, 560, 600, 640], // one that does
    [300e3, 690, 690.5, 700], // so near that little else is left
    [20e3, 280, 320, 360], // below the reach of the closed form
  ])('logarithm, its slope and bend for E = %d from %d K to %d and %d K', (E, start, T1, T2) => {
    const x0 = 1 / T2;
    const T = Float64Array.of(0, T1, T2);
    const out = { value: new Float64Array(3), byEnergy: new Float64Array(3), byEnergy2: new Float64Array(3) };
    fillRampIntegrals(start, T, 1, 2, 0.5, E, x0, out, 1);
    for (const k of [1, 2]) {
      const dt = (T[k] - start) / 0.5;
      const at = (t: number) => 1 / (start + 0.5 * t) - x0;
      const value = simpson((t) => Math.exp((-E / GAS_CONSTANT) * at(t)), dt);
      const moment = (power: number) =>
        simpson((t) => (-at(t) / GAS_CONSTANT) ** power * Math.exp((-E / GAS_CONSTANT) * at(t)), dt) / value;
      expect(Math.abs(out.value[k] - Math.log(value))).toBeLessThan(1e-6);
      expect(Math.abs(out.byEnergy[k] - moment(1))).toBeLessThan(1e-6 / GAS_CONSTANT / T1);
      expect(Math.abs(out.byEnergy2[k] * E ** 2 - (moment(2) - moment(1) ** 2) * E ** 2)).toBeLessThan(2e-3);
    }
    expect([out.value[0], out.byEnergy[0], out.byEnergy2[0]]).toEqual([0, 0, 0]);
  });
});
