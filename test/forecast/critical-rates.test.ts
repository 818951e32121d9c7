import { describe, expect, test } from 'vitest';
import { criticalRateRows, drawTransformation, findCriticalRates } from '../../jobs/forecast/index.ts';
import { GAS_CONSTANT as R } from '../../schema/wire/units.ts';
import { validate } from '../validation/validate.ts';
import { LAW, sourceOf, straightLaw } from './sources.ts';

const law = { ...straightLaw(250e3, 36, 3, 600, 700), frozenBelowK: 600 };
const CRITICAL = 5.936772450986e3;
const NOSE_K = 968.997426396;
const NOSE_S = 1.301424998511e-2;
const melting = { meltingK: 1000, enthalpyJPerMol: 20e3 };
const source = sourceOf(law, { sdExponent: 0.02 }, { melting });

describe('critical rates by the integral', () => {
  // Exact synthetic (no published critical cooling rate with all its kinetics at hand): SciPy 1.17.1, test/reference/scipy/forecast_profiles.py.
  test('rate and nose to 1e-7', () => {
    const found = findCriticalRates(source)!;
    const check = (quantity: string, expected: number, got: number, within: number) =>
      validate({ method: 'critical rate', quantity, source: 'scipyForecast', expected, got, within });
    check('critical heating rate, K/s', CRITICAL, found.heatingKPerS.value, 1e-7 * CRITICAL);
    expect(found.coolingKPerS!.value).toBe(found.heatingKPerS.value);
    check('temperature of the nose, K', NOSE_K, found.nose!.temperatureK, 5e-4);
    check('time of the nose, s', NOSE_S, found.nose!.timeS, 1e-8 * NOSE_S);
    expect(found.heatingKPerS.lower95!).toBeLessThan(CRITICAL);
    expect(found.heatingKPerS.upper95!).toBeGreaterThan(CRITICAL);
    expect(found.flags.map((f) => f.code)).toEqual(['quench-nuclei']);
  });
  test('no cooling rate without an enthalpy, nothing at all without a melting temperature', () => {
    const bare = findCriticalRates({ ...source, melting: { meltingK: 1000 } })!;
    expect(bare.coolingKPerS).toBeUndefined();
    expect(bare.nose).toBeUndefined();
    expect(bare.flags.map((f) => f.code)).toEqual(['driving-force-ignored']);
    // Without the driving force the law runs up to melting unchecked.
    expect(bare.heatingKPerS.value).toBeGreaterThan(CRITICAL);
    expect(findCriticalRates({ ...source, melting: undefined })).toBeUndefined();
  });
  test('rows of the consolidated table', () => {
    const { parameters } = criticalRateRows(source, { count: 8, rateMinKPerS: 0.05, rateMaxKPerS: 5 });
    expect(parameters.map((p) => [p.quantity, p.unit, p.conversion, p.flags])).toEqual([
      ['critical_heating_rate', 'K/s', null, []],
      ['critical_cooling_rate', 'K/s', null, ['quench-nuclei']],
    ]);
  });
});

describe('the nose of published glasses', () => {
  // Liquidus, VFT viscosity and temperature of the largest growth rate: data.csv of supp_code_jezica, Jiusti et al., J. Am. Ceram. Soc. 103 (2020) 921.
  // Enthalpies of melting: from memory. With pre-existing nuclei the nose is where growth ∝ [1 − exp(−Δμ/RT)]/η is fastest.
  test.each([
    ['diopside CaO·MgO·2SiO2', 4874.5, 689.9, 1664, 137.7e3, 1614],
    ['Li2O·2SiO2', 3082.4, 509.6, 1303, 61e3, 1210],
  ])('%s: within 3 %% of the measured temperature', (name, B, T0, liquidusK, enthalpyJPerMol, fastestK) => {
    // The bent law that touches 1/η at 0.9 of the liquidus: E_loc = R B ln 10/(1 − T0 x)², d ln E_loc/dx = 2 T0/(1 − T0 x).
    const x0PerK = 1 / (0.9 * liquidusK);
    const dxPerK = 0.05 * x0PerK;
    const viscous = {
      ...LAW,
      x0PerK,
      dxPerK,
      energyJPerMol: (R * B * Math.LN10) / (1 - T0 * x0PerK) ** 2,
      bend: (dxPerK * 2 * T0) / (1 - T0 * x0PerK),
      lowestMeasuredK: 0.8 * liquidusK,
      highestMeasuredK: 0.9 * liquidusK,
      frozenBelowK: 0.6 * liquidusK,
    };
    const { nose } = findCriticalRates(sourceOf(viscous, {}, { melting: { meltingK: liquidusK, enthalpyJPerMol } }))!;
    const quantity = `temperature of the nose, ${name}, K`;
    const [expected, got] = [fastestK, nose!.temperatureK];
    validate({ method: 'critical rate', quantity, source: 'fastestGrowth', expected, got, within: 0.03 * fastestK });
  });
});

describe('diagrams', () => {
  test('time–temperature–transformation turns back at the nose and is the forecast at each temperature', () => {
    const line = drawTransformation(source, [0.01]).find((l) => l.method === 'shared_law')!;
    expect(line.x.length).toBeGreaterThan(70);
    let fastest = 0;
    line.y.forEach((t, i) => {
      if (t < line.y[fastest]) fastest = i;
      expect(line.lower[i]).toBeLessThanOrEqual(t);
      expect(line.upper[i]).toBeGreaterThanOrEqual(t);
    });
    expect(Math.abs(line.x[fastest] - NOSE_K)).toBeLessThan(6);
    line.x.forEach((T, i) => {
      expect(line.beyondMeasuredK[i]).toBe(T < 600 ? 600 - T : T > 700 ? T - 700 : 0);
    });
    expect(fastest).toBeLessThan(line.x.length - 1);
  });
  test('a source without a law draws the model-free lines only', () => {
    const free = { ...source, law: undefined, lawDraws: undefined };
    expect(new Set(drawTransformation(free).map((l) => l.method))).toEqual(new Set(['model_free']));
  });
});
