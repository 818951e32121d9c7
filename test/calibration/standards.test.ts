import { expect, test } from 'vitest';
import {
  calibrateFromStandards,
  findReferenceSubstance,
  type StandardObservation,
} from '../../jobs/calibration/index.ts';
import { calibrateSimulated } from '../study/standards.ts';
import type { SourceName } from '../validation/sources.ts';
import { validate } from '../validation/validate.ts';

// ITS-90 freezing points: Preston-Thomas, Metrologia 27 (1990) 3. Enthalpies: In, Archer & Rudtsch, J. Chem. Eng. Data 48
// (2003) 1157, 28.6624 J/g; Zn, CRC Handbook, 7068 J/mol ÷ 65.38 g/mol; Sn, GEFTA recommendation 60.4 J/g (from memory).
test.each<[string, number, number, SourceName]>([
  ['indium 5 mg', 429.7485, 28_662.4, 'indiumEnthalpy'],
  ['Sn', 505.078, 60_400, 'tinEnthalpy'],
  ['zinc-2', 692.677, 7068 / 0.06538, 'handbookEnthalpy'],
  ['Al', 933.473, 10_710 / 0.0269815385, 'handbookEnthalpy'],
])('%s is a known standard', (name, meltingK, enthalpy, source) => {
  const { meltingK: got = 0, enthalpyJPerKg = 0 } = findReferenceSubstance(name) ?? {};
  const method = 'calibration';
  validate({ method, quantity: `melting of «${name}», K`, source: 'its90', expected: meltingK, got, within: 0 });
  const expected = enthalpy / 1e3;
  const quantity = `enthalpy of melting of «${name}», J/g`;
  validate({ method, quantity, source, expected, got: enthalpyJPerKg / 1e3, within: 5e-5 * expected });
});

test('a sample whose name merely holds a symbol is none', () => {
  expect(findReferenceSubstance('insulin')).toBeUndefined();
  expect(findReferenceSubstance('SnTe film')).toBeUndefined();
});

const RATES = [0.03, 0.1, 0.3, 1];
/** Exact onsets late by a + b (T − 550) + τ β, moved by `scatter` × a fixed ± pattern. */
function observations(a: number, tau: number, slope = 0, scatter = 0, rates = RATES): StandardObservation[] {
  return ['In', 'Sn', 'Zn'].flatMap((name, m) => {
    const substance = findReferenceSubstance(name)!;
    return rates.map((rateKPerS, k) => ({
      ...substance,
      perMass: false,
      massKg: 5e-6,
      melting: {
        rateKPerS,
        onsetK:
          substance.meltingK +
          a +
          slope * (substance.meltingK - 550) +
          tau * rateKPerS +
          scatter * ((m + k) % 2 ? 1 : -1),
        onsetErrorK: 0.01,
        peakK: substance.meltingK + 1,
        area: (5e-6 * substance.enthalpyJPerKg) / 1.04,
        areaError: 0,
      },
    }));
  });
}

test('exact onsets give offset, lag, slope of the offset and heat factor back', () => {
  const c = calibrateFromStandards('furnace', undefined, 1, observations(0.7, 3.2, 1.5e-3));
  expect(c).toMatchObject({ source: 'standards', kind: 'furnace', standards: 12 });
  expect(c.lagS).toBeCloseTo(3.2, 6);
  expect(c.offsetSlope).toBeCloseTo(1.5e-3, 8);
  // a is told at the mean melting temperature
  expect(c.offsetK).toBeCloseTo(0.7 + 1.5e-3 * (c.offsetAtK! - 550), 6);
  expect(c.heatFactor).toBeCloseTo(1.04, 10);
});

test('scatter that noise does not know of widens the errors', () => {
  const quiet = calibrateFromStandards('f', undefined, 1, observations(0.7, 3.2, 0, 0));
  const rough = calibrateFromStandards('f', undefined, 1, observations(0.7, 3.2, 0, 0.3));
  expect(rough.offsetSeK).toBeGreaterThan(5 * quiet.offsetSeK);
});

test('one rate cannot tell the lag: the sheet’s is kept and taken off before the offset', () => {
  const row = { instrument: 'f', lagS: 3.2, lagErrorS: 0.4, line: 2 };
  const c = calibrateFromStandards('f', row, 1, observations(0.7, 3.2, 0, 0, [0.3]));
  expect(c).toMatchObject({ lagS: 3.2, lagSeS: 0.4 });
  expect(c.offsetK).toBeCloseTo(0.7, 6);
});

test('no standard: the sheet or the prior as before', () => {
  expect(calibrateFromStandards('f', undefined, 1, [])).toMatchObject({ source: 'prior', standards: 0 });
});

test('simulated In, Sn and Zn at five rates: offset to 0.1 K, lag to 4 %, heat to 0.5 %, inside four errors', () => {
  for (let index = 0; index < 4; index++) {
    const { calibration: c, offsetK, lagS, heatFactor } = calibrateSimulated('test', index);
    expect(Math.abs(c.offsetK - offsetK)).toBeLessThan(0.1);
    expect(Math.abs(c.lagS / lagS - 1)).toBeLessThan(0.04);
    expect(Math.abs(c.lagS - lagS)).toBeLessThan(4 * Math.sqrt(c.covariance![4]));
    expect(Math.abs(c.heatFactor! / heatFactor - 1)).toBeLessThan(0.005);
  }
});
