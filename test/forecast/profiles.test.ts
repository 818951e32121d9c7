import { describe, expect, test } from 'vitest';
import { modelFreeKinetics } from '../../jobs/forecast/model-free-kinetics.ts';
import {
  accumulate,
  COARSE,
  FINE,
  layPanels,
  lnIntegral,
  lnIntegralAlong,
  timeOfIntegral,
} from '../../jobs/forecast/programme.ts';
import { sharedRateCurve } from '../../jobs/forecast/rate-curve.ts';
import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { validate } from '../validation/validate.ts';
import { LAW, programme } from './sources.ts';

// Expected numbers: SciPy 1.17.1 (quad, brentq, expn), test/reference/scipy/forecast_profiles.py, which writes out laws and profiles itself.

const REFLOW = programme(
  [
    [0, 25],
    [90, 150],
    [180, 200],
    [210, 217],
    [240, 260],
    [270, 260],
    [300, 217],
    [420, 60],
  ].map(([t, C]) => [t, C + 273.15] as const),
);
const REFLOW_LAW: SharedLaw = {
  ...LAW,
  lnRateAtMiddle: -5,
  energyJPerMol: 180e3,
  bend: 0.2,
  x0PerK: 1 / 530,
  dxPerK: 1.5e-4,
  avramiExponent: 3,
  frozenBelowK: 480,
};
const SEASONAL = programme(
  Array.from({ length: 4 * 365 + 1 }, (_, i) => {
    const d = i / 4;
    const celsius = 11 + 13 * Math.sin((2 * Math.PI * (d - 110)) / 365) + 6 * Math.sin(2 * Math.PI * d);
    return [d * 86400, 273.15 + celsius] as const;
  }),
);
const SEASONAL_LAW: SharedLaw = {
  ...LAW,
  lnRateAtMiddle: -9,
  energyJPerMol: 140e3,
  bend: 0.25,
  x0PerK: 1 / 330,
  dxPerK: 1e-4,
  avramiExponent: 1.7,
  frozenBelowK: 300,
};

const relative = (got: number, expected: number) => Math.abs(got / expected - 1);

describe('the shared law along a programme', () => {
  test.each([
    ['reflow', REFLOW, REFLOW_LAW, 4.024780596554e-1, 6.311698280978e-2],
    ['seasonal', SEASONAL, SEASONAL_LAW, 2.422012124981e-1, 8.58526357627e-2],
  ])('%s profile: ∫K dt and conversion to 1e-8', (name, table, law, integral, conversion) => {
    const curve = sharedRateCurve(law, law);
    const panels = layPanels(table, curve.steepness, curve.breaksK, FINE);
    const theta = Math.exp(lnIntegral(accumulate(panels, curve.lnRate)));
    const end = -Math.expm1(-(theta ** law.avramiExponent));
    const given = { method: 'forecast, shared law', source: 'scipyForecast' } as const;
    validate({ ...given, quantity: `∫K dt, ${name} profile`, expected: integral, got: theta, within: 1e-8 * integral });
    const quantity = `conversion at the end, ${name} profile`;
    validate({ ...given, quantity, expected: conversion, got: end, within: 1e-7 * conversion });
    expect(relative(Math.exp(lnIntegralAlong(panels, curve.lnRate)), theta)).toBeLessThan(1e-12);
    // The rule of the draws is what it says: to 1e-5 on these.
    const coarse = layPanels(table, curve.steepness, curve.breaksK, COARSE);
    expect(relative(Math.exp(lnIntegral(accumulate(coarse, curve.lnRate))), integral)).toBeLessThan(1e-5);
  });

  test('reflow profile: times to conversion to 1e-8', () => {
    const curve = sharedRateCurve(REFLOW_LAW, REFLOW_LAW);
    const panels = layPanels(REFLOW, curve.steepness, curve.breaksK, FINE);
    const done = accumulate(panels, curve.lnRate);
    const time = (a: number) => timeOfIntegral(panels, done, curve.lnRate, Math.log(-Math.log1p(-a)) / 3);
    for (const [a, expected] of [
      [0.001, 243.0935553661],
      [0.05, 276.8556594057],
    ]) {
      const quantity = `time to α = ${a} in a reflow profile, s`;
      const [got, within] = [time(a), 1e-8 * expected];
      validate({ method: 'forecast, shared law', quantity, source: 'scipyForecast', expected, got, within });
    }
  });

  test('a bent law through its frozen point', () => {
    const curve = sharedRateCurve(LAW, LAW);
    expect(curve.lnRate(560)).toBeCloseTo(-16.031562416228, 11);
    expect(curve.lnRate(680)).toBeCloseTo(-3.784919884031, 11);
    const panels = layPanels(
      programme([
        [0, 550],
        [280, 690],
      ]),
      curve.steepness,
      curve.breaksK,
      FINE,
    );
    expect(relative(Math.exp(lnIntegral(accumulate(panels, curve.lnRate))), 1.310486727532)).toBeLessThan(1e-9);
  });
});

describe('the model-free prediction along a programme', () => {
  test('reflow profile: the times of the first nine segments to 1e-8', () => {
    const conversions = Float64Array.from({ length: 19 }, (_, k) => (k + 1) / 20);
    const { estimate: kinetics } = modelFreeKinetics({
      conversions,
      energyJPerMol: conversions.map((_, k) => 150e3 + 4e3 * k),
      lnStep: conversions.map((_, k) => 2.2 - 0.12 * k + 0.006 * k * k),
      share: Float64Array.from({ length: 99 }, (_, g) => ((g % 5) + 1) / 5),
      x0PerK: 1 / 530,
    });
    const panels = layPanels(REFLOW, () => kinetics.steepness(), [], FINE);
    const expected = [
      235.4639028414, 242.858450844, 248.7419983663, 254.0903952046, 259.0110116632, 263.5927147343, 267.9103494729,
      272.290424785, 279.9598226801,
    ];
    for (const [k, t] of expected.entries())
      validate({
        method: 'forecast, model-free',
        quantity: `time to α = ${conversions[k]} in a reflow profile, s`,
        source: 'scipyForecast',
        expected: t,
        got: kinetics.timeOn(panels, conversions[k]),
        within: 1e-8 * t,
      });
    // The tenth is not reached: the conversion at the end lies between the ninth and the tenth.
    const end = -Math.expm1(-Math.exp(kinetics.extentOn(panels)));
    expect(end).toBeGreaterThan(0.45);
    expect(end).toBeLessThan(0.5);
  });
});
