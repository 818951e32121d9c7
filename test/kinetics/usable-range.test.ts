import { describe, expect, test } from 'vitest';
import { CONVERSION_COUNT, collectEvent } from '../../jobs/kinetics/event-data.ts';
import { fitSample } from '../../jobs/kinetics/index.ts';
import { modelScatter } from '../../jobs/kinetics/monte-carlo.ts';
import type { FitResult, FitScan, ParameterRow } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { exactScan, furnace } from './exact-curves.ts';
import { exactCooling, exactHold } from './exact-programmes.ts';

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

describe('holds and ramps together', () => {
  const ramps = exact.slice(1);
  const holds = [590, 600, 610, 620].map((T, i) => exactHold(240e3, 42, 2.7, T, 0, `hold-${i}`));
  /** A glass transition that reaches into the event up to α = 0.3: the curve too early there by up to 3 K, the faster the more. */
  const early = (scan: FitScan): FitScan => {
    const curve = scan.event.curve!;
    const temperatureK = curve.temperatureK.map((T, k) => {
      const below = Math.max(0, 0.3 - 1e-9 - CONVERSION_GRID[k]);
      return T - 15 * below * scan.event.rateKPerS;
    });
    return { ...scan, event: { ...scan.event, usableFrom: 0.3, curve: { ...curve, temperatureK } } };
  };
  const blind = (scan: FitScan): FitScan => ({ ...scan, event: { ...scan.event, usableFrom: 0.01, usableTo: 0.99 } });
  const widthOf = (p: ParameterRow) => p.upper95! - p.lower95!;
  const energies = (f: FitResult, method: string) =>
    f.parameters.filter((p) => p.method === method && p.conversion !== null && p.interval === 'monte_carlo');

  test.each([
    ['melting reaches into the ramps', spoil],
    ['a glass transition does', early],
  ])('%s: the truth at every conversion from what is usable, and not without the mark', (_, damage) => {
    const marked = analyse([...ramps.map(damage), ...holds]);
    const clean = analyse([...ramps, ...holds]);
    const unmarked = analyse([...ramps.map((s) => blind(damage(s))), ...holds]);
    for (const method of ['friedman', 'vyazovkin']) {
      expect(energies(marked, method)).toHaveLength(19);
      for (const [k, p] of energies(marked, method).entries()) {
        // The exact holds leave out what happens on the way to them: Vyazovkin's first step counts from there.
        if (k > 0 || method === 'friedman') expect(Math.abs(p.value / 240 - 1)).toBeLessThan(2e-3);
        // What was left out widens nothing either.
        expect(widthOf(p)).toBeLessThan(1.2 * widthOf(energies(clean, method)[k]));
      }
      const worst = Math.max(...energies(unmarked, method).map((p) => Math.abs(p.value / 240 - 1)));
      expect(worst).toBeGreaterThan(0.02);
    }
    expect(marked.flags.map((f) => f.code)).toContain('mixed-programmes');
  });
  test('where only two programmes are usable there is no row, and the mean is of the others', () => {
    const two = analyse([...ramps.slice(1).map(spoil), ...holds.slice(0, 2).map(spoil), ...holds.slice(2)]);
    for (const method of ['friedman', 'vyazovkin']) {
      expect(conversions(two, method)).toEqual(Array.from({ length: 16 }, (_, k) => (k + 1) / 20));
      expect(Math.abs(find(two, 'activation_energy', method) / 240 - 1)).toBeLessThan(2e-3);
    }
  });
  test('the same holds for ramps down', () => {
    const down = [2, 5, 10, 20].map((b, i) => exactCooling(-240e3, -55, 2.7, b / 60, 640, `down-${i}`));
    const cut = analyse(down.map(spoil));
    expect(conversions(cut, 'vyazovkin')).toHaveLength(16);
  });
});
