import { describe, expect, test } from 'vitest';
import { fitSample } from '../../jobs/kinetics/index.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { validate } from '../validation/validate.ts';
import { parallelScan } from './parallel-reactions.ts';

const furnace: InstrumentCalibration = {
  instrument: 'furnace',
  kind: 'furnace',
  source: 'sheet',
  offsetK: 0,
  offsetSeK: 0.1,
  lagS: 0,
  lagSeS: 1,
  responseS: 0,
  standards: 0,
};

/**
 * Exact curves computed apart with mpmath at 40 digits (two equally weighted parallel reactions, kinetics of the ICTAC project sets 7 and 8,
 * Brown et al. 2000, Thermochim. Acta 355:125): α; T at 0.5 and 8 K/min; E by Friedman, KAS, Starink and the integral from zero, kJ/mol.
 */
const EXACT = [
  [0.05, 338.442482, 370.856702, 85.2153, 83.3501, 83.5188, 83.5331],
  [0.1, 346.698673, 380.105586, 87.6309, 84.8752, 85.0485, 85.0638],
  [0.2, 355.905473, 390.058586, 91.9684, 87.4872, 87.6647, 87.68],
  [0.3, 362.085047, 396.409652, 96.3769, 90.0887, 90.2684, 90.2826],
  [0.4, 367.108919, 401.318571, 101.0311, 92.8956, 93.0763, 93.089],
  [0.5, 371.600625, 405.505213, 105.8361, 95.9996, 96.1807, 96.1914],
  [0.6, 375.862142, 409.33586, 110.4517, 99.4166, 99.5977, 99.6063],
  [0.7, 380.085439, 413.079075, 114.3149, 103.0681, 103.249, 103.2553],
  [0.8, 384.482083, 417.050644, 116.8355, 106.7871, 106.9678, 106.9721],
  [0.9, 389.598633, 421.948255, 117.557, 110.4044, 110.5856, 110.5883],
  [0.95, 393.120932, 425.563588, 116.8555, 112.1522, 112.3343, 112.3365],
];

describe('two parallel first-order reactions, 0.5 to 8 K/min', () => {
  const scans = [0.5, 1, 2, 4, 8].map((b, i) => parallelScan(b / 60, `scan-${i}`));
  const fit = fitSample({ sample: 'two', scans, instruments: [furnace], seed: '02', draws: 30 });
  const at = (method: string, conversion: number) =>
    fit.parameters.find(
      (p) =>
        p.quantity === 'activation_energy' &&
        p.method === method &&
        p.conversion === conversion &&
        p.interval === 'monte_carlo',
    )!.value;

  test('the curves of the test are the exact ones to 1e-5 K', () => {
    for (const [a, slow, fast] of EXACT) {
      const k = Math.round(a * 100) - 1;
      expect(Math.abs(scans[0].event.curve!.temperatureK[k] - slow)).toBeLessThan(1e-5);
      expect(Math.abs(scans[4].event.curve!.temperatureK[k] - fast)).toBeLessThan(1e-5);
    }
  });
  test.each(EXACT)(
    'α = %d: Friedman, KAS, Starink and the linear Vyazovkin form to 1e-5',
    (a, _s, _f, friedman, kas, starink, full) => {
      const check = (method: string, expected: number) =>
        validate({
          method,
          quantity: `E at α = ${a}, two parallel reactions, kJ/mol`,
          source: 'parallel',
          expected,
          got: at(method, a),
          within: 5e-6 * expected,
        });
      check('friedman', friedman);
      check('kissinger_akahira_sunose', kas);
      check('starink', starink);
      check('vyazovkin_linear', full);
    },
  );
  test('incremental Vyazovkin is Friedman’s E in the middle of its step, to 0.2 %, which the integral from zero is not', () => {
    for (const [a, , , friedman, , , full] of EXACT.slice(1)) {
      const middle = (friedman + at('friedman', Math.round(20 * a - 1) / 20)) / 2;
      const quantity = `E of the step to α = ${a} against the middle of Friedman’s, two parallel reactions, kJ/mol`;
      const [expected, got] = [middle, at('vyazovkin', a)];
      validate({ method: 'vyazovkin', quantity, source: 'parallel', expected, got, within: 2e-3 * middle });
      if (a >= 0.3 && a <= 0.8) expect(at('vyazovkin', a) - full).toBeGreaterThan(3);
    }
  });
  test('energy-varies is raised, and JMAK gives way to the Šesták–Berggren law or a flag', () => {
    expect(fit.flags.map((f) => f.code)).toContain('energy-varies');
    expect(fit.flags.map((f) => f.code)).toContain('not-avrami');
    expect(fit.parameters.some((p) => p.method === 'sestak_berggren')).toBe(true);
  });
});
