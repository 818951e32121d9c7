import { describe, expect, test } from 'vitest';
import { fitHold, localExponent } from '../../jobs/kinetics/avrami/isothermal.ts';
import { fitSample } from '../../jobs/kinetics/index.ts';
import type { FitInput, FitResult } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { exactScan, furnace } from './exact-curves.ts';
import { exactCooling, exactHold } from './exact-programmes.ts';

const E = 240e3;
const LN_A = 42;
const N = 2.7;
const fitOf = (scans: FitInput['scans']): FitResult =>
  fitSample({ sample: 'glass', scans, instruments: [furnace], seed: '0a', draws: 60 });
const row = (
  f: FitResult,
  quantity: string,
  method: string,
  temperature: number | null = null,
  conversion: number | null = null,
) =>
  f.parameters.find(
    (p) =>
      p.quantity === quantity &&
      p.method === method &&
      p.temperature_K === temperature &&
      p.conversion === conversion &&
      p.interval === 'monte_carlo' &&
      p.variant === '',
  );
const holdsAt = [590, 600, 610, 620];
const ramps = () => [5, 10, 20, 40].map((b, i) => exactScan(E, LN_A, N, b / 60, 400, `ramp-${i}`));

describe('isothermal JMAK (exact curves: an identity)', () => {
  test('n, K and the induction time come back from one curve to 1e-6, and the local exponent is n everywhere', () => {
    const hold = exactHold(E, LN_A, N, 600, 0.3, 'h');
    const fit = fitHold(hold.event.curve!.timeS, CONVERSION_GRID, 60);
    expect(fit.exponent).toBeCloseTo(N, 6);
    expect(fit.lnRate).toBeCloseTo(LN_A - E / (8.31446261815324 * 600), 6);
    expect(fit.bounded).toBe(false);
    expect(fit.fit.converged).toBe(true);
    for (const v of localExponent(hold.event.curve!.timeS, CONVERSION_GRID, fit.startS)) expect(v).toBeCloseTo(N, 4);
  });
  test('t0 wrong by 5 % of t½ moves n = 3 by 0.17: the fit finds t0, a fixed one does not', () => {
    const hold = exactHold(E, LN_A, 3, 600, 0.5, 'h');
    const { timeS } = hold.event.curve!;
    const free = fitHold(timeS, CONVERSION_GRID, 60);
    expect(free.exponent).toBeCloseTo(3, 6);
    const half = timeS[49] - free.startS;
    // Bound 5 % of t½ before the true start, and the curve moved so that the fit runs into it.
    const late = fitHold(timeS, CONVERSION_GRID, free.startS + 0.05 * half);
    expect(late.bounded).toBe(true);
    expect(3 - late.exponent).toBeGreaterThan(0.1);
    expect(3 - late.exponent).toBeLessThan(0.25);
  });
  test('a series: E, ln A and n to 1e-5, rows for each hold with its temperature, the pooled one without', () => {
    const fit = fitOf(holdsAt.map((T, i) => exactHold(E, LN_A, N, T, 0.2, `h${i}`)));
    expect(fit.state).toBe('fitted');
    for (const T of holdsAt) expect(row(fit, 'avrami_exponent', 'jmak_isothermal', T)!.value).toBeCloseTo(N, 5);
    expect(row(fit, 'avrami_exponent', 'jmak_isothermal')!.value).toBeCloseTo(N, 5);
    expect(row(fit, 'activation_energy', 'jmak_isothermal')!.value).toBeCloseTo(240, 3);
    expect(row(fit, 'ln_prefactor', 'jmak_isothermal')!.value).toBeCloseTo(LN_A, 3);
    // ln t_α against 1/T: the isoconversional E of the holds.
    for (const method of ['friedman', 'vyazovkin']) {
      expect(row(fit, 'activation_energy', method)!.value / 240).toBeCloseTo(1, 3);
    }
    expect(fit.parameters.some((p) => p.method === 'kissinger')).toBe(false);
  });
  test('scatter between holds: the interval of E is that of the line ln K against 1/T within 40 %, and holds the truth', () => {
    const stretch = [1.06, 0.95, 1.03, 0.94, 1.05, 0.98];
    const T = [585, 592, 600, 607, 614, 620];
    const fit = fitSample({
      sample: 'glass',
      scans: T.map((t, i) => exactHold(E, LN_A, N, t, 0.2, `h${i}`, stretch[i])),
      instruments: [furnace],
      seed: '0b',
      draws: 300,
    });
    const mc = row(fit, 'activation_energy', 'jmak_isothermal')!;
    const line = fit.parameters.find(
      (p) => p.method === 'jmak_isothermal' && p.quantity === 'activation_energy' && p.interval === 'student_t',
    )!;
    const ratio = (mc.upper95! - mc.lower95!) / (line.upper95! - line.lower95!);
    expect(ratio).toBeGreaterThan(0.6);
    expect(ratio).toBeLessThan(1.4);
    expect(mc.lower95!).toBeLessThan(240);
    expect(mc.upper95!).toBeGreaterThan(240);
  });
  test('two temperatures: exponents but no energy, with the reason', () => {
    const fit = fitOf([600, 610].map((T, i) => exactHold(E, LN_A, N, T, 0.2, `h${i}`)));
    expect(fit.parameters.some((p) => p.quantity === 'activation_energy')).toBe(false);
    expect(fit.flags.some((f) => f.code === 'few-rates' && /three temperatures/.test(f.detail))).toBe(true);
    expect(fit.reports.some((r) => !r.converged && /three temperatures/.test(r.message))).toBe(true);
  });
  test('a hold reached when much had crystallised is told and left out', () => {
    const late = exactHold(E, LN_A, N, 600, 0.2, 'late');
    late.event.holdReachedS = late.event.curve!.timeS[19];
    const fit = fitOf([late, ...[605, 610, 620].map((T, i) => exactHold(E, LN_A, N, T, 0.2, `h${i}`))]);
    expect(fit.flags.find((f) => f.code === 'hold-late')?.file).toBe('late');
    expect(row(fit, 'avrami_exponent', 'jmak_isothermal', 600)).toBeUndefined();
  });
});

describe('mixed programmes', () => {
  test('ramps and holds in one isoconversional fit give the one E; JMAK stays apart', () => {
    const fit = fitOf([...ramps(), ...holdsAt.map((T, i) => exactHold(E, LN_A, N, T, 0, `h${i}`))]);
    for (const method of ['friedman', 'vyazovkin']) {
      const r = fit.parameters.filter(
        (p) => p.method === method && p.quantity === 'activation_energy' && p.interval === 'monte_carlo',
      );
      expect(r).toHaveLength(20);
      // The first step runs from the programme's start, and the holds here lack what 5 K/s of ramp adds to it.
      for (const p of r) expect(Math.abs(p.value / 240 - 1)).toBeLessThan(p.conversion === 0.05 ? 0.03 : 1.5e-3);
      expect(r[0].scan_count).toBe(8);
    }
    expect(row(fit, 'activation_energy', 'jmak')!.scan_count).toBe(4);
    expect(row(fit, 'activation_energy', 'jmak_isothermal')!.scan_count).toBe(4);
    expect(fit.flags.map((f) => f.code)).toContain('mixed-programmes');
  });
  test('two ramps and one hold are three programmes: E(α), and few-rates for the rest', () => {
    const fit = fitOf([...ramps().slice(0, 2), exactHold(E, LN_A, N, 600, 0, 'h')]);
    expect(row(fit, 'activation_energy', 'vyazovkin')!.value / 240).toBeCloseTo(1, 3);
    expect(fit.parameters.some((p) => p.method === 'kissinger')).toBe(false);
    expect(fit.flags.map((f) => f.code)).toContain('few-rates');
  });
});

describe('cooling', () => {
  const cool = (energy: number, lnA: number, shifts: number[] = []) =>
    [2, 4, 7, 10].map((b, i) => exactCooling(energy, lnA, 2.5, b / 60, 480, `c${i}`, shifts[i] ?? 0));
  test('E = −300 kJ/mol and n = 2.5 come back; heating methods are not computed', () => {
    const fit = fitOf(cool(-300e3, -88.5));
    for (const method of ['friedman', 'vyazovkin']) {
      expect(row(fit, 'activation_energy', method)!.value / -300).toBeCloseTo(1, 3);
      expect(row(fit, 'activation_energy', method, null, 0.5)!.value / -300).toBeCloseTo(1, 3);
    }
    expect(row(fit, 'avrami_exponent', 'ozawa')!.value).toBeCloseTo(2.5, 2);
    expect(new Set(fit.parameters.map((p) => p.method))).toEqual(new Set(['friedman', 'vyazovkin', 'ozawa']));
    expect(fit.flags.map((f) => f.code)).toContain('cooling');
    expect(fit.reports.find((r) => r.method === 'kissinger')).toMatchObject({ converged: false });
    expect(row(fit, 'activation_energy', 'friedman')!.rate_min_K_per_s).toBeCloseTo(2 / 60, 9);
  });
  test('scatter widens the interval about the truth', () => {
    const fit = fitOf(cool(-300e3, -88.5, [0.3, -0.2, 0.25, -0.3]));
    const r = row(fit, 'activation_energy', 'vyazovkin')!;
    expect(r.lower95!).toBeLessThan(-300);
    expect(r.upper95!).toBeGreaterThan(-300);
    expect(r.upper95! - r.lower95!).toBeGreaterThan(1);
  });
  test('heating and cooling scans of one number never share a fit', () => {
    const fit = fitOf([...ramps(), ...cool(-300e3, -88.5)]);
    const alone = fitOf(ramps());
    expect(fit.parameters.filter((p) => p.event === 1)).toEqual(alone.parameters);
    expect(fit.parameters.filter((p) => p.event === 2).length).toBeGreaterThan(20);
    expect(fit.flags.find((f) => f.code === 'cooling')?.detail).toMatch(/1 on the scans/);
  });
});
