import { describe, expect, test } from 'vitest';
import { fitSample } from '../../jobs/kinetics/index.ts';
import type { FitInput, FitResult } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { exactScan, furnace } from './exact-curves.ts';

const E = 240e3;
const LN_A = 42;
const N = 2.7;
const ramps = (rates: number[], shifts: number[] = []) =>
  rates.map((b, i) => exactScan(E, LN_A, N, b / 60, 400, `scan-${i}`, shifts[i] ?? 0));
const input = (scans: FitInput['scans'], over: Partial<FitInput> = {}): FitInput => ({
  sample: 'glass',
  scans,
  instruments: [furnace],
  seed: '00ff',
  draws: 60,
  ...over,
});
const row = (f: FitResult, quantity: string, method: string, conversion: number | null = null) =>
  f.parameters.find(
    (p) =>
      p.quantity === quantity &&
      p.method === method &&
      p.conversion === conversion &&
      p.interval === 'monte_carlo' &&
      (p.variant === '' || p.variant === 'peak'),
  )!;

describe('exact JMAK curves, E = 240 kJ/mol, ln A = 42, n = 2.7 (integrated apart from the project)', () => {
  const rates = [2, 5, 10, 20, 40];
  const fit = fitSample(input(ramps(rates)));

  test('Friedman and Vyazovkin give the constant E to 0.05 % at every conversion', () => {
    for (const method of ['friedman', 'vyazovkin']) {
      const rows = fit.parameters.filter(
        (p) => p.method === method && p.conversion !== null && p.interval === 'monte_carlo',
      );
      expect(rows.map((p) => p.conversion)).toEqual(Array.from({ length: 19 }, (_, k) => (k + 1) / 20));
      for (const p of rows) expect(Math.abs(p.value / 240 - 1)).toBeLessThan(5e-4);
    }
  });
  test('JMAK gives E, ln A and n to 1e-6', () => {
    expect(row(fit, 'activation_energy', 'jmak').value / 240).toBeCloseTo(1, 6);
    expect(row(fit, 'ln_prefactor', 'jmak').value / LN_A).toBeCloseTo(1, 6);
    expect(row(fit, 'avrami_exponent', 'jmak').value / N).toBeCloseTo(1, 6);
    expect(fit.reports.find((r) => r.method === 'jmak')).toMatchObject({ converged: true, rows: 95 });
  });
  test('the line methods come within their known bias: KAS 0.2 %, Starink 0.05 %, OFW corrected 0.1 %', () => {
    const at = (method: string) => Math.abs(row(fit, 'activation_energy', method).value / 240 - 1);
    expect(at('kissinger_akahira_sunose')).toBeLessThan(2e-3);
    expect(at('starink')).toBeLessThan(5e-4);
    expect(at('ozawa_flynn_wall')).toBeLessThan(1e-3);
  });
  test('the order of the scans changes nothing, byte for byte', () => {
    const reversed = fitSample(input(ramps(rates).reverse()));
    expect(JSON.stringify(reversed.parameters)).toBe(JSON.stringify(fit.parameters));
  });
  test('another seed moves the intervals but not the estimates', () => {
    const other = fitSample(input(ramps(rates), { seed: '1234' }));
    expect(other.parameters.map((p) => p.value)).toEqual(fit.parameters.map((p) => p.value));
    expect(row(other, 'activation_energy', 'kissinger').lower95).not.toBe(
      row(fit, 'activation_energy', 'kissinger').lower95,
    );
  });
});

describe('intervals', () => {
  test('a lag error alone: its effect on E by hand is the spread of the draws', () => {
    // Exact curves: no scatter. T shifts by −τ β, so E(τ) is a function of one normal number; its slope by finite difference.
    const rates = [2, 5, 10, 20, 40];
    const lagOnly = { ...furnace, offsetSeK: 0, lagSeS: 0.5 };
    const fit = fitSample(input(ramps(rates), { instruments: [lagOnly], draws: 400 }));
    const shifted = fitSample(
      input(
        ramps(
          rates,
          rates.map((b) => (-0.5 * b) / 60),
        ),
        { draws: 5 },
      ),
    );
    const byHand = Math.abs(
      row(shifted, 'activation_energy', 'kissinger').value - row(fit, 'activation_energy', 'kissinger').value,
    );
    const r = row(fit, 'activation_energy', 'kissinger');
    // The size of a calibration error is given, not estimated: 1.960, the normal quantile (NIST/SEMATECH e-Handbook 1.3.6.7.1).
    const spread = (Math.log(r.upper95! / r.lower95!) / 2 / 1.96) * r.value;
    expect(spread / byHand).toBeGreaterThan(0.9);
    expect(spread / byHand).toBeLessThan(1.1);
  });
  test('scatter alone: the Monte Carlo interval of Kissinger is that of the straight line (ordinary theory), within 25 %', () => {
    // Rates within a factor 8, so that the trend is straight; shifts of a fixed pattern as scatter.
    const rates = [5, 5, 10, 10, 20, 20, 40, 40];
    const shifts = [0.31, -0.22, -0.4, 0.18, 0.25, -0.33, 0.12, -0.05];
    const exact = { ...furnace, offsetSeK: 0, lagSeS: 0 };
    const fit = fitSample(input(ramps(rates, shifts), { instruments: [exact], draws: 1000 }));
    const mc = row(fit, 'activation_energy', 'kissinger');
    const theory = fit.parameters.find(
      (p) => p.method === 'kissinger' && p.interval === 'student_t' && p.quantity === 'activation_energy',
    )!;
    const ratio = (mc.upper95! - mc.lower95!) / (theory.upper95! - theory.lower95!);
    expect(ratio).toBeGreaterThan(0.75);
    expect(ratio).toBeLessThan(1.25);
  });
});

describe('refusals and flags', () => {
  test('two rates: no number, the reason and what to do', () => {
    const fit = fitSample(input(ramps([10, 10, 20])));
    expect(fit.state).toBe('insufficient');
    expect(fit.parameters).toEqual([]);
    expect(fit.reason).toMatch(/2 distinct heating rates; at least 3/);
    expect(fit.flags.map((f) => f.code)).toContain('few-rates');
  });
  test('no event at all', () => {
    expect(fitSample(input([])).reason).toMatch(/no scan of this sample shows an event/);
  });
  test('a scan 6 K off is told as an outlier with its file, and stays in', () => {
    const shifts = [0.05, -0.03, 0.02, -0.06, 0.04, 6, -0.02, 0.03];
    const fit = fitSample(input(ramps([5, 5, 10, 10, 20, 20, 40, 40], shifts)));
    const told = fit.flags.filter((f) => f.code === 'outlier');
    expect(told.map((f) => f.file)).toEqual(['scan-5']);
    expect(row(fit, 'activation_energy', 'kissinger').scan_count).toBe(8);
  });
  test('two energies one after the other raise energy-varies, one energy does not', () => {
    const rates = [2, 5, 10, 20, 40];
    expect(fitSample(input(ramps(rates))).flags.map((f) => f.code)).not.toContain('energy-varies');
    // T(α) of a mixture: first half from E = 200, second from E = 300 kJ/mol.
    const mixed = rates.map((b, i) => {
      const low = exactScan(200e3, 33, N, b / 60, 400, `scan-${i}`);
      const high = exactScan(300e3, 48, N, b / 60, 400, `scan-${i}`);
      const c = low.event.curve!;
      const h = high.event.curve!;
      for (let k = 0; k < 99; k++) {
        const f = (k + 1) / 100;
        c.temperatureK[k] = (1 - f) * c.temperatureK[k] + f * Math.max(h.temperatureK[k], c.temperatureK[k]);
        c.timeS[k] = (c.temperatureK[k] - 400) / (b / 60);
      }
      return low;
    });
    const fit = fitSample(input(mixed));
    expect(fit.flags.map((f) => f.code)).toContain('energy-varies');
    expect(row(fit, 'activation_energy', 'vyazovkin').flags).toContain('energy-varies');
  });
  test('an instrument of which nothing is known widens the interval and is told', () => {
    const prior: InstrumentCalibration = { ...furnace, source: 'prior', offsetSeK: 0.5, lagSeS: 3 };
    const known = fitSample(input(ramps([2, 5, 10, 20, 40])));
    const unknown = fitSample(input(ramps([2, 5, 10, 20, 40]), { instruments: [prior] }));
    const width = (f: FitResult) => {
      const r = row(f, 'activation_energy', 'kissinger');
      return r.upper95! - r.lower95!;
    };
    expect(width(unknown)).toBeGreaterThan(2 * width(known));
    expect(unknown.flags.map((f) => f.code)).toContain('lag-unknown');
  });
  test('scans of temperatures only still get the peak methods, and curve methods say why not', () => {
    const scans = ramps([2, 5, 10, 20, 40]).map((s) => ({ ...s, event: { ...s.event, curve: undefined } }));
    const fit = fitSample(input(scans));
    expect(fit.state).toBe('fitted');
    expect(row(fit, 'activation_energy', 'kissinger').value / 240).toBeCloseTo(1, 1);
    expect(fit.parameters.some((p) => p.method === 'friedman')).toBe(false);
    expect(fit.flags.some((f) => f.code === 'few-rates' && /conversion curves/.test(f.detail))).toBe(true);
  });
  test('curves on three scans only, among ten: both kinds of methods run, with intervals', () => {
    const scans = ramps([2, 2, 5, 5, 10, 10, 20, 20, 40, 40]).map((s, i) =>
      [0, 4, 8].includes(i) ? s : { ...s, event: { ...s.event, curve: undefined } },
    );
    const fit = fitSample(input(scans));
    expect(row(fit, 'activation_energy', 'kissinger').scan_count).toBe(10);
    expect(row(fit, 'activation_energy', 'friedman')).toMatchObject({ scan_count: 3, lower95: expect.any(Number) });
  });
});
