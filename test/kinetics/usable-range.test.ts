import { expect, test } from 'vitest';
import { CONVERSION_COUNT, collectEvent } from '../../jobs/kinetics/event-data.ts';
import { fitSample } from '../../jobs/kinetics/index.ts';
import { modelScatter } from '../../jobs/kinetics/monte-carlo.ts';
import type { FitResult, FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { exactScan, furnace } from './exact-curves.ts';

// Exact curves of E = 240 kJ/mol, ln A = 42, n = 2.7, spoilt above α = 0.8 as a melting close behind the event would, and marked so.
const exact = [2, 5, 10, 20, 40].map((b, i) => exactScan(240e3, 42, 2.7, b / 60, 400, `scan-${i}`));
const spoil = (scan: FitScan): FitScan => {
  const curve = scan.event.curve!;
  const temperatureK = curve.temperatureK.map((T, k) =>
    CONVERSION_GRID[k] > 0.8 + 1e-9 ? T + 300 * (CONVERSION_GRID[k] - 0.8) * scan.event.rateKPerS : T,
  );
  return { ...scan, event: { ...scan.event, usableTo: 0.8, curve: { ...curve, temperatureK } } };
};
const analyse = (scans: FitScan[]) =>
  fitSample({ sample: 'glass', scans, instruments: [furnace], seed: '00ff', draws: 40 });
const find = (f: FitResult, quantity: string, method: string) =>
  f.parameters.find(
    (p) => p.quantity === quantity && p.method === method && p.conversion === null && p.interval === 'monte_carlo',
  )!.value;
const conversions = (f: FitResult, method: string) =>
  f.parameters
    .filter((p) => p.method === method && p.conversion !== null && p.interval === 'monte_carlo')
    .map((p) => p.conversion);

test('every scan cut at 0.8: no rows above, and the truth from what is left', () => {
  const cut = analyse(exact.map(spoil));
  for (const method of ['friedman', 'vyazovkin', 'starink', 'vyazovkin_linear']) {
    expect(conversions(cut, method)).toEqual(Array.from({ length: 16 }, (_, k) => (k + 1) / 20));
    expect(Math.abs(find(cut, 'activation_energy', method) / 240 - 1)).toBeLessThan(1e-3);
  }
  expect(find(cut, 'activation_energy', 'jmak') / 240).toBeCloseTo(1, 5);
  expect(find(cut, 'avrami_exponent', 'jmak') / 2.7).toBeCloseTo(1, 5);
  expect(cut.flags.map((f) => f.code)).not.toContain('energy-varies');
});

test('two of five cut: the other three still give the rows above, by themselves', () => {
  const some = analyse(exact.map((s, i) => (i < 2 ? spoil(s) : s)));
  expect(conversions(some, 'vyazovkin')).toHaveLength(19);
  for (const p of some.parameters.filter((p) => p.method === 'vyazovkin' && p.interval === 'monte_carlo'))
    expect(Math.abs(p.value / 240 - 1)).toBeLessThan(1e-3);
  expect(find(some, 'avrami_exponent', 'jmak') / 2.7).toBeCloseTo(1, 5);
  // Methods over whole curves rest on those three.
  expect(find(some, 'avrami_exponent', 'matusita_sakka') / 2.7).toBeCloseTo(1, 1);
});

test('unmarked, the same spoilt curves are off: the mark is what helps', () => {
  const blind = analyse(exact.map((s) => ({ ...spoil(s), event: { ...spoil(s).event, usableTo: 0.99 } })));
  expect(Math.abs(find(blind, 'avrami_exponent', 'jmak') / 2.7 - 1)).toBeGreaterThan(0.005);
});

test('where a scan is not usable, what stands for its scatter is that of its nearest usable conversion', () => {
  // Scans out of place by 0.1–0.5 K, so that residuals differ from scan to scan; the first two are spoilt above 0.8.
  const moved = [2, 5, 10, 20, 40].map((b, i) =>
    exactScan(240e3, 42, 2.7, b / 60, 400, `scan-${i}`, [1, -3, 5, -2, 1][i] / 10),
  );
  const data = collectEvent(
    1,
    moved.map((s, i) => (i < 2 ? spoil(s) : s)),
    [furnace],
  );
  const { temperature } = modelScatter(data, Uint16Array.from([0, 1, 2, 3, 4]), 5);
  expect(Array.from(data.usable.subarray(15, CONVERSION_COUNT))).toEqual([1, 0, 0, 0]);
  for (const k of [16, 17, 18]) {
    expect(temperature[k].residuals[0]).toBe(temperature[15].residuals[0]);
    expect(temperature[k].residuals[3]).not.toBe(temperature[15].residuals[3]);
  }
});
