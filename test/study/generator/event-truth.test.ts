import { describe, expect, test } from 'vitest';
import { eventTruths } from './event-truth.ts';
import { rampProgramme } from './programme.ts';
import { jmakLaw, sestakBerggrenLaw } from './rate-laws.ts';
import type { ScanModel } from './scan-model.ts';
import { solveScan } from './solve-scan.ts';
import { arrheniusLaw, R } from './temperature-laws.ts';

const IDEAL = { offsetK: 0, shiftS: 0, responseS: 0 };

const scanOf = (exponent: number, startK: number, endK: number, rateKPerS: number): ScanModel => ({
  sample: {
    events: [{ temperature: arrheniusLaw(200e3, Math.log(1e14)), rate: jmakLaw(exponent), enthalpyJPerKg: 50e3 }],
  },
  instrument: IDEAL,
  programme: rampProgramme(startK, endK, rateKPerS),
  massKg: 10e-6,
});

// Exact JMAK peaks, E = 200 kJ/mol, K0 = 1e14 1/s, n = 3, computed with mpmath at 40 digits
// (reference set B5, file isoconversional/B5_exact_JMAK_wide_rates.json; R = 8.314462618 there, which moves Tp by 2e-11 of itself).
const EXACT_PEAKS = [
  [5 / 60, 641.203923806, 0.626006241],
  [40 / 60, 676.812805403, 0.625689227],
  [10, 729.390323442, 0.625225069],
  [1000, 839.656485643, 0.624266449],
  [50000, 962.164076051, 0.623224115],
] as const;

test.each(EXACT_PEAKS)('the peak at %d K/s is that of the exact solution', (rateKPerS, peakK, conversion) => {
  const [event] = eventTruths(scanOf(3, 300, 1100, rateKPerS));
  expect(Math.abs(event.peakK - peakK)).toBeLessThan(5e-8);
  expect(Math.abs(event.conversionAtPeak - conversion)).toBeLessThan(5e-9);
});

describe('first order at a constant rate follows the temperature integral', () => {
  // p(x) = exp(−x)/x − E1(x): mpmath at 60 digits, reference file temperature-integral/p_of_x_table.csv
  // (E1 agrees with Abramowitz & Stegun 1964, table 5.1, where that reaches).
  const P = {
    20: 4.702428215429074e-12,
    25: 2.062777906453916e-14,
    30: 9.76556455912457e-17,
    40: 2.531530237124028e-21,
  };
  test('−ln(1 − α) = A E/(β R) [p(x) − p(x0)] at four temperatures', () => {
    const [energy, prefactor, rate] = [200e3, 1e14, 0.5];
    const temperature = (x: number): number => energy / (R * x);
    const model = scanOf(1, temperature(40), temperature(20), rate);
    const wanted = [30, 25, 20] as const;
    const times = Float64Array.from(wanted, (x) =>
      Math.min(model.programme.endS, (temperature(x) - temperature(40)) / rate),
    );
    const solution = solveScan(model, times);
    wanted.forEach((x, k) => {
      const exact = ((prefactor * energy) / (rate * R)) * (P[x] - P[40]);
      expect(Math.abs(solution.conversion[0][k] + Math.expm1(-exact))).toBeLessThan(1e-10);
    });
  });
});

test('the Šesták–Berggren law with M = 0, N = 1 is the first-order law', () => {
  const times = Float64Array.from({ length: 20 }, (_, k) => (k + 1) * 40);
  const first = scanOf(1, 500, 900, 0.5);
  const same: ScanModel = {
    ...first,
    sample: { events: [{ ...first.sample.events[0], rate: sestakBerggrenLaw(0, 1) }] },
  };
  const [a, b] = [solveScan(first, times), solveScan(same, times)];
  for (let k = 0; k < times.length; k++) expect(b.conversion[0][k]).toBeCloseTo(a.conversion[0][k], 9);
});

test('the Šesták–Berggren law obeys the balance dα/dt = K α^M (1 − α)^N and peaks where that is stationary', () => {
  const model = scanOf(1, 500, 900, 0.5);
  model.sample.events[0].rate = sestakBerggrenLaw(0.6, 1.3);
  const [event] = eventTruths(model);
  const h = 1e-3;
  const { conversion, ratePerS } = solveScan(model, Float64Array.of(event.timeS - h, event.timeS, event.timeS + h));
  expect((conversion[0][2] - conversion[0][0]) / (2 * h) / ratePerS[0][1]).toBeCloseTo(1, 6);
  expect(ratePerS[0][1]).toBeGreaterThan(ratePerS[0][0]);
  expect(ratePerS[0][1]).toBeGreaterThan(ratePerS[0][2]);
});

// Two parallel first-order reactions of equal weight, A = 1e10 and 1e15 1/min, E = 80 and 120 kJ/mol (kinetics of Brown
// et al., Thermochim. Acta 355 (2000) 125, sets 7 and 8), computed with mpmath at 40 digits: reference set B3, file
// isoconversional/B3_two_parallel_first_order_exact.json. Rate K/min, conversion, T in K, dα/dt in 1/min.
test.each([
  [1, 0.1, 354.662875, 0.007792599766],
  [1, 0.9, 396.880351, 0.01685599414],
  [8, 0.5, 405.505213, 0.2019855322],
])('two events side by side: %d K/min at α = %d', (ratePerMin, conversion, temperatureK, ratePerMinute) => {
  const event = (energy: number, perMinute: number) => ({
    temperature: arrheniusLaw(energy, Math.log(perMinute / 60)),
    rate: jmakLaw(1),
    enthalpyJPerKg: 1,
  });
  const startK = 200;
  const programme = rampProgramme(startK, 500, ratePerMin / 60);
  const model: ScanModel = {
    sample: { events: [event(80e3, 1e10), event(120e3, 1e15)] },
    instrument: IDEAL,
    programme,
    massKg: 1,
  };
  const timeS = ((temperatureK - startK) / ratePerMin) * 60;
  const solution = solveScan(model, Float64Array.of(timeS));
  const mean = (columns: Float64Array[]): number => (columns[0][0] + columns[1][0]) / 2;
  expect(Math.abs(mean(solution.conversion) - conversion)).toBeLessThan(1e-7);
  expect((mean(solution.ratePerS) * 60) / ratePerMinute).toBeCloseTo(1, 6);
});

test('cooling down a ramp converts as much as heating up it: ∫K dT is the same', () => {
  const up = scanOf(3, 550, 660, 0.5);
  const down: ScanModel = { ...up, programme: rampProgramme(660, 550, 0.5) };
  const end = Float64Array.of(up.programme.endS);
  const [heated, cooled] = [up, down].map((model) => solveScan(model, end).conversion[0][0]);
  expect(heated).toBeGreaterThan(0.1);
  expect(cooled).toBeCloseTo(heated, 10);
});
