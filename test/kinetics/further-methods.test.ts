import { describe, expect, test } from 'vitest';
import { fitSample } from '../../jobs/kinetics/index.ts';
import { type ArrheniusIntegral, addStretch } from '../../jobs/laws/arrhenius-integral.ts';
import { fisherQuantile } from '../../jobs/numeric/distributions.ts';
import type { FitInput, FitResult } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { validate } from '../validation/validate.ts';
import { exactScan, furnace } from './exact-curves.ts';
import { sestakBerggrenScan, smearedScan } from './exact-laws.ts';

const E = 240e3;
const LN_A = 42;
const fitOf = (scans: FitInput['scans'], calibration: InstrumentCalibration = furnace): FitResult =>
  fitSample({ sample: 'glass', scans, instruments: [calibration], seed: '0c', draws: 40 });
const rows = (f: FitResult, quantity: string, method: string, variant = '', interval = 'monte_carlo') =>
  f.parameters.filter(
    (p) => p.quantity === quantity && p.method === method && p.variant === variant && p.interval === interval,
  );
const pooled = (f: FitResult, quantity: string, method: string, variant = '') =>
  rows(f, quantity, method, variant).find((p) => p.conversion === null)!.value;
const jmak = (n: number, perMinute: number[], shifts: number[] = []) =>
  perMinute.map((b, i) => exactScan(E, LN_A, n, b / 60, 400, `scan-${i}`, shifts[i] ?? 0));

describe('exact JMAK curves with n = 3', () => {
  const fit = fitOf(jmak(3, [10, 14, 20, 28]));
  test('Ozawa 1971 gives n to 0.1 % (an identity at constant T)', () => {
    expect(pooled(fit, 'avrami_exponent', 'ozawa')).toBeCloseTo(3, 2);
  });
  test('Matusita–Sakka gives n to 1 % and E with m = n to 1.5 % (Doyle’s 1.052 is an approximation), and tells m = n − 1', () => {
    expect(Math.abs(pooled(fit, 'avrami_exponent', 'matusita_sakka') / 3 - 1)).toBeLessThan(0.01);
    expect(Math.abs(pooled(fit, 'activation_energy', 'matusita_sakka') / 240 - 1)).toBeLessThan(0.015);
    expect(fit.reports.find((r) => r.method === 'matusita_sakka')?.message).toMatch(/m = n − 1 .*35\d\.\d kJ/);
  });
  test('the compensation line gives ln A to 1 %', () => {
    expect(Math.abs(pooled(fit, 'ln_prefactor', 'friedman') / LN_A - 1)).toBeLessThan(0.01);
  });
  test('z(α) has its top at 1 − 1/e and A3 is nearest to y(α) (Málek 1992)', () => {
    const r = fit.reports.find((v) => v.method === 'master_plots')!;
    expect(r.message).toMatch(/top at 0\.632.*nearest to y\(α\): A3 \(distance 0\.000\)/);
    expect(fit.flags.map((f) => f.code)).not.toContain('not-avrami');
    expect(fit.parameters.some((p) => p.method === 'sestak_berggren')).toBe(false);
  });
  test('n comes with what it may mean, as a note', () => {
    const note = fit.flags.find((f) => f.code === 'exponent-reading')!;
    expect(note.severity).toBe('note');
    expect(note.detail).toMatch(/growth in three dimensions from nuclei already there.*cannot tell them apart/);
  });
  test('the linear Vyazovkin form gives E to 0.1 % at every conversion', () => {
    expect(rows(fit, 'activation_energy', 'vyazovkin_linear')).toHaveLength(20);
    for (const p of rows(fit, 'activation_energy', 'vyazovkin_linear')) {
      expect(Math.abs(p.value / 240 - 1)).toBeLessThan(1e-3);
    }
  });
});

describe('intervals beside the Monte Carlo ones', () => {
  const fit = fitOf(jmak(2.7, [5, 10, 20, 40, 80], [0.4, -0.3, 0.2, -0.5, 0.3]));
  test('Student’s t at every conversion for the line methods, Vyazovkin & Wight’s for Vyazovkin; both about the same value', () => {
    for (const method of ['friedman', 'kissinger_akahira_sunose', 'starink', 'ozawa_flynn_wall']) {
      const t = rows(fit, 'activation_energy', method, '', 'student_t');
      expect(t).toHaveLength(19);
      const mc = rows(fit, 'activation_energy', method).filter((p) => p.conversion !== null);
      t.forEach((p, k) => {
        expect(p.value).toBeCloseTo(mc[k].value, 6);
        expect(p.upper95! - p.value).toBeCloseTo(p.value - p.lower95!, 6);
      });
    }
    const wight = rows(fit, 'activation_energy', 'vyazovkin', '', 'f_ratio');
    expect(wight).toHaveLength(19);
    for (const p of wight) {
      expect(p.lower95!).toBeLessThan(p.value);
      expect(p.upper95!).toBeGreaterThan(p.value);
    }
  });
  test('F quantiles are those of the table (NIST/SEMATECH e-Handbook 1.3.6.7.3, 5 %)', () => {
    for (const [a, b, expected] of [
      [2, 2, 19.0],
      [4, 4, 6.388],
      [9, 9, 3.179],
      [1, 10, 4.965],
    ]) {
      const got = fisherQuantile(0.95, a, b);
      const quantity = `F(0.95; ${a}, ${b})`;
      validate({ method: 'quantiles', quantity, source: 'nistHandbook', expected, got, within: 5e-4 });
    }
    expect(() => fisherQuantile(1, 2, 2)).toThrow(RangeError);
  });
});

describe('methods that do not apply give the reason', () => {
  test('Ozawa on rates ten times apart: no row, a report that did not converge, a note', () => {
    const fit = fitOf(jmak(3, [1, 10, 100]));
    expect(rows(fit, 'avrami_exponent', 'ozawa')).toEqual([]);
    expect(fit.reports.find((r) => r.method === 'ozawa')).toMatchObject({ converged: false });
    expect(fit.flags.some((f) => f.code === 'method-not-applicable' && /three distinct rates/.test(f.detail))).toBe(
      true,
    );
  });
  test('a ramp that starts too near: Augis–Bennett says why', () => {
    const near = jmak(2.7, [5, 10, 20]).map((s) => ({ ...s, event: { ...s.event, rampStartK: 550 } }));
    const fit = fitOf(near);
    expect(rows(fit, 'activation_energy', 'augis_bennett')).toEqual([]);
    expect(fit.reports.find((r) => r.method === 'augis_bennett')).toMatchObject({ converged: false });
  });
});

describe('curves that are not JMAK', () => {
  test('an exact Šesták–Berggren law with M = 0.3, N = 0.5: z(α) says not-avrami, and E, ln A, M, N come back to 0.1 %', () => {
    const fit = fitOf([5, 10, 20, 40].map((b, i) => sestakBerggrenScan(200e3, 35, 0.3, 0.5, b / 60, `scan-${i}`)));
    expect(fit.flags.filter((f) => f.code === 'not-avrami')).toHaveLength(1);
    const value = (quantity: string) => pooled(fit, quantity, 'sestak_berggren');
    expect(value('activation_energy') / 200).toBeCloseTo(1, 3);
    expect(value('ln_prefactor') / 35).toBeCloseTo(1, 3);
    expect(value('model_exponent_m')).toBeCloseTo(0.3, 3);
    expect(value('model_exponent_n')).toBeCloseTo(0.5, 3);
    expect(fit.flags.map((f) => f.code)).not.toContain('exponent-reading');
  });
});

describe('variants', () => {
  test('a scan 6 K off: both answers, the one without it near the truth', () => {
    const shifts = [0.05, -0.03, 0.02, -0.06, 0.04, 6, -0.02, 0.03];
    const fit = fitOf(jmak(2.7, [5, 5, 10, 10, 20, 20, 40, 40], shifts));
    const off = (variant: string) => Math.abs(pooled(fit, 'activation_energy', 'vyazovkin', variant) / 240 - 1);
    expect(off('without_outliers')).toBeLessThan(2e-3);
    expect(off('')).toBeGreaterThan(3 * off('without_outliers'));
    const without = rows(fit, 'activation_energy', 'kissinger', 'without_outliers');
    expect(without).toHaveLength(1);
    expect(without[0].scan_count).toBe(7);
    expect(rows(fit, 'activation_energy', 'kissinger')[0].scan_count).toBe(8);
  });
  test('no outlier and a known response: no variant at all', () => {
    expect(fitOf(jmak(2.7, [5, 10, 20])).parameters.every((p) => p.variant === '' || p.variant === 'peak')).toBe(true);
  });
  test('a response of 6 s that nobody knows of: full_response brings Friedman’s E and n back', () => {
    const unknown: InstrumentCalibration = { ...furnace, lagS: 6, responseS: undefined };
    const perMinute = [5, 10, 20, 40];
    const fit = fitOf(
      perMinute.map((b, i) => smearedScan(E, LN_A, 3, b / 60, 6, `scan-${i}`)),
      unknown,
    );
    const off = (quantity: string, method: string, truth: number, variant: string) =>
      Math.abs(pooled(fit, quantity, method, variant) / truth - 1);
    expect(off('activation_energy', 'friedman', 240, '')).toBeGreaterThan(0.015);
    expect(off('activation_energy', 'friedman', 240, 'full_response')).toBeLessThan(0.01);
    expect(off('activation_energy', 'vyazovkin', 240, 'full_response')).toBeLessThan(0.01);
    expect(off('avrami_exponent', 'jmak', 3, 'full_response')).toBeLessThan(0.02);
    expect(off('activation_energy', 'kissinger', 240, 'full_response')).toBeLessThan(0.01);
  });
});

describe('the Arrhenius integral at low and negative E', () => {
  const integral = (energy: number, T1: number, T2: number, dt: number): ArrheniusIntegral => {
    const out = { value: 0, byEnergy: 0, byEnergy2: 0 };
    addStretch(T1, T2, dt, energy / GAS_CONSTANT, energy / GAS_CONSTANT / 450, out);
    return out;
  };
  /** Midpoint sum with 2e5 steps: error (h²/24) f″, below 1e-8 here. */
  const byHand = (energy: number, T1: number, T2: number, dt: number, power: number) => {
    const steps = 2e5;
    let sum = 0;
    for (let i = 0; i < steps; i++) {
      const T = T1 + ((T2 - T1) * (i + 0.5)) / steps;
      sum += Math.exp((energy / GAS_CONSTANT) * (1 / 450 - 1 / T)) * (-1 / (GAS_CONSTANT * T)) ** power;
    }
    return (sum * dt) / steps;
  };
  test.each([
    [0, 400, 500],
    [-300e3, 480, 420],
    [-1e6, 460, 440],
    [15e3, 400, 500],
    [1e3, 300, 900],
  ])('E = %d J/mol from %d to %d K: value and both derivatives to 1e-7', (energy, T1, T2) => {
    const J = integral(energy, T1, T2, 30);
    expect(J.value / byHand(energy, T1, T2, 30, 0)).toBeCloseTo(1, 7);
    expect(J.byEnergy / byHand(energy, T1, T2, 30, 1)).toBeCloseTo(1, 7);
    expect(J.byEnergy2 / byHand(energy, T1, T2, 30, 2)).toBeCloseTo(1, 7);
  });
  test('the branches meet: just above and below x = 10 the integral is the same to 1e-6', () => {
    const at = (x: number) => integral(x * GAS_CONSTANT * 500, 400, 500, 30).value;
    const step = (at(10 + 1e-7) - at(10 - 1e-7)) / at(10);
    expect(Math.abs(step)).toBeLessThan(2e-6);
  });
});
