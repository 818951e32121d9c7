import { describe, expect, test } from 'vitest';
import { adviseScans, scansToReach, weighScans, widthsOf } from '../../jobs/campaign/advice.ts';
import type { AdviceInput } from '../../jobs/campaign/advice-input.ts';
import { analyseForAdvice, LawPrecision } from '../../jobs/campaign/advice-law.ts';
import { studentQuantile } from '../../jobs/numeric/distributions.ts';
import { createRandom } from '../../jobs/numeric/random.ts';
import { FORECAST_CAUTION, FORECAST_TABLES } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT as R } from '../../schema/wire/units.ts';
import { exactScan } from '../kinetics/exact-curves.ts';

const [ENERGY, LN_A, N] = [300e3, 50, 3];
/** The exact curves are slow to make: each rate once. */
const made = new Map<number, ReturnType<typeof exactScan>>();
function scanAt(rate: number, name: string, shiftK: number) {
  const exact = made.get(rate) ?? exactScan(ENERGY, LN_A, N, rate, 500, 'exact');
  made.set(rate, exact);
  const { event } = exact;
  const move = (T: number) => T + shiftK;
  return {
    ...exact,
    file: name,
    sha256: name,
    event: {
      ...event,
      peakK: move(event.peakK),
      centroidK: move(event.centroidK),
      curve: { ...event.curve!, temperatureK: event.curve!.temperatureK.map(move) },
    },
  };
}

/** Furnace scans of one Arrhenius law with a scatter of 0.2 K between scans. */
function input(rates: readonly number[], extra: Partial<AdviceInput> = {}): AdviceInput {
  const random = createRandom('advice test');
  const scans = rates.map((rate, i) => scanAt(rate, `scan-${i}`, 0.2 * random.normal()));
  return {
    sample: 'glass-a',
    event: 1,
    scans,
    instruments: [
      {
        instrument: 'furnace',
        kind: 'furnace',
        source: 'standards',
        offsetK: 0,
        offsetSeK: 0.1,
        lagS: 0,
        lagSeS: 0.2,
        responseS: 0,
        standards: 3,
      },
    ],
    ranges: [{ instrument: 'furnace', rateMinKPerS: 0.02, rateMaxKPerS: 2 }],
    energyJPerMol: ENERGY,
    avramiExponent: N,
    goals: [{ goal: 'energy' }],
    ...extra,
  };
}

const RATES = [0.08, 0.1, 0.16, 0.2, 0.3, 0.4, 0.08, 0.4];

describe('advice for the activation energy', () => {
  test('the ends of the range narrow it most, the middle least; best three in order', () => {
    // With a lag that is known well: an uncertain lag moves fast scans most and takes their worth.
    const sure = input(RATES);
    sure.instruments[0].lagSeS = 0;
    const rows = adviseScans(sure);
    expect(rows.map((r) => r.rank)).toEqual([1, 2, 3]);
    // The lever of a line is longest at its ends: the slowest or the fastest rate the furnace reaches.
    for (const row of rows) expect(row.rate_K_per_s < 0.05 || row.rate_K_per_s > 0.8, `${row.rate_K_per_s}`).toBe(true);
    const all = weighScans(sure, { goal: 'energy' });
    const middle = all.find((w) => Math.abs(w.rateKPerS - 0.2) < 0.01)!;
    expect(middle.expected).toBeGreaterThan(rows[2].interval_expected);
    for (const row of rows) {
      expect(row.interval_expected).toBeLessThan(row.interval_now);
      expect(row.sentence).toMatch(/^One more scan at .* on furnace widens the rates .* from .* to .* kJ\/mol\.$/);
    }
  });

  test('the width is that of a straight line by hand where calibration is exact', () => {
    const exact = input(RATES);
    exact.instruments[0].offsetSeK = 0;
    exact.instruments[0].lagSeS = 0;
    const width = widthsOf(exact)({ goal: 'energy' })()!;
    // By hand: se(slope) = s/√Sxx with s the scatter in ln β, one weight for all; T at α = 0.5.
    const x = exact.scans.map((s) => 1 / s.event.curve!.temperatureK[49]);
    const y = exact.scans.map((s, i) => Math.log(s.event.rateKPerS * x[i] ** 2));
    const mean = (v: number[]) => v.reduce((a, b) => a + b, 0) / v.length;
    const sxx = x.reduce((s, v) => s + (v - mean(x)) ** 2, 0);
    const slope = x.reduce((s, v, i) => s + (v - mean(x)) * (y[i] - mean(y)), 0) / sxx;
    const rms = Math.sqrt(y.reduce((s, v, i) => s + (v - mean(y) - slope * (x[i] - mean(x))) ** 2, 0) / (x.length - 2));
    const byHand = (2 * studentQuantile(0.975, x.length - 2) * R * rms) / Math.sqrt(sxx) / 1e3;
    // The scatter is taken over the peak and four conversions and shrunk: the same to a few per cent.
    expect(Math.abs(width / byHand - 1)).toBeLessThan(0.1);
  });

  test('calibration errors, whose size is given, count with the normal quantile', () => {
    const sure = input(RATES);
    sure.instruments[0].offsetSeK = 0;
    sure.instruments[0].lagSeS = 0;
    const unsure = input(RATES);
    unsure.instruments[0].offsetSeK = 0;
    unsure.instruments[0].lagSeS = 0.7;
    const [a, b] = [sure, unsure].map((i) => widthsOf(i)({ goal: 'energy' })()!);
    // By hand: E = R × slope of ln(β/T²) against −1/T; a lag error τ moves T by τβ.
    const x = sure.scans.map((s) => 1 / s.event.curve!.temperatureK[49]);
    const mean = x.reduce((p, v) => p + v, 0) / x.length;
    const sxx = x.reduce((p, v) => p + (v - mean) ** 2, 0);
    const moved =
      x.reduce((p, v, i) => p + (v - mean) * ENERGY * v ** 2 * sure.scans[i].event.rateKPerS * 0.7, 0) / sxx;
    expect(Math.sqrt(b * b - a * a) / ((2 * 1.959964 * Math.abs(moved)) / 1e3)).toBeCloseTo(1, 3);
  });

  test('the width shown stands, the expected one moves with it', () => {
    const [free] = adviseScans(input(RATES));
    const [shown] = adviseScans(input(RATES, { goals: [{ goal: 'energy', now: 2 * free.interval_now }] }));
    expect(shown.interval_now).toBe(2 * free.interval_now);
    expect(shown.interval_expected).toBeCloseTo(2 * free.interval_expected, 9);
  });

  test('scans to a wanted width: one for hardly less, none for far less', () => {
    const some = input(RATES);
    const width = widthsOf(some)({ goal: 'energy' });
    const best = weighScans(some, { goal: 'energy' })[0];
    expect(scansToReach(width, best, best.expected / best.now + 1e-9)).toBe(1);
    const half = scansToReach(width, best, 0.5);
    expect(half).not.toBe(0);
    expect(scansToReach(width, best, 1e-3)).toBeNull();
  });

  test('only what can be run: within the range, below melting, not smeared away', () => {
    const rates = (extra: Partial<AdviceInput>) =>
      weighScans(input(RATES, extra), { goal: 'energy' }).map((w) => w.rateKPerS);
    expect(Math.min(...rates({}))).toBeGreaterThanOrEqual(0.02);
    expect(Math.max(...rates({}))).toBeLessThanOrEqual(2);
    const peaks = input(RATES).scans.map((s) => s.event.peakK);
    const melting = rates({ meltingK: Math.max(...peaks) + 25 });
    expect(Math.max(...melting)).toBeLessThan(Math.max(...rates({})));
    const slow = input(RATES);
    slow.instruments[0].responseS = 30;
    const left = weighScans(slow, { goal: 'energy' }).map((w) => w.rateKPerS);
    expect(Math.max(...left)).toBeLessThan(1);
  });

  test('two rates or fewer give no advice on a width that does not exist', () => {
    expect(adviseScans(input([0.1, 0.2]))).toEqual([]);
  });
});

describe('advice for the bend and a forecast', () => {
  const two = (): AdviceInput => {
    const base = input([0.05, 0.1, 0.2, 0.5, 1, 0.05, 0.2, 1]);
    const random = createRandom('advice chip');
    const chip = [10, 30, 100, 300, 1000, 3000].map((rate, i) => {
      const scan = scanAt(rate, `chip-${i}`, 0.6 * random.normal());
      return { ...scan, instrument: 'chip' };
    });
    return {
      ...base,
      scans: [...base.scans, ...chip],
      instruments: [
        ...base.instruments,
        {
          ...base.instruments[0],
          instrument: 'chip',
          kind: 'chip' as const,
          offsetSeK: 0.5,
          lagSeS: 1e-4,
          responseS: 1e-5,
        },
      ],
      ranges: [
        { instrument: 'furnace', rateMinKPerS: 0.02, rateMaxKPerS: 5 },
        { instrument: 'chip', rateMinKPerS: 5, rateMaxKPerS: 20000 },
      ],
      goals: [{ goal: 'bend' }, { goal: 'forecast', conversion: 0.01, temperatureK: 560 }],
    };
  };
  const rows = adviseScans(two());
  test('three rows a goal, each narrower than now', () => {
    expect(rows.map((r) => [r.goal, r.rank, r.unit])).toEqual([
      ['bend', 1, '1'],
      ['bend', 2, '1'],
      ['bend', 3, '1'],
      ['forecast', 1, 'decades'],
      ['forecast', 2, 'decades'],
      ['forecast', 3, 'decades'],
    ]);
    for (const row of rows) expect(row.interval_expected).toBeLessThan(row.interval_now);
  });
  test('the caution stands on every row', () => {
    expect(FORECAST_TABLES.advice).toContain('caution');
    for (const row of rows) expect(row.caution).toBe(FORECAST_CAUTION);
  });
  test('one more row by the update is one more row in the normal equations', () => {
    const analysis = analyseForAdvice(two())!.bend;
    const precision = new LawPrecision(analysis);
    const candidate = { instrument: 'furnace', rateKPerS: 0.02 };
    const goal = { gradient: [1, 0, 0] as const, exponentVariance: 0, decides: [[0, 1, 0]] as const };
    // Only the exponent's share counts with t on n − p whatever the scatter: what is left of the ratio is the square root of the variances'.
    const { jacobian, layout } = analysis.fit;
    const { p, rows } = layout;
    const row = precision.row(candidate)!.row;
    const varianceOf = (times: number) => {
      // Independent: Gauss–Jordan on JᵀJ with `times` copies of the row.
      const A = Array.from({ length: p }, (_, a) =>
        Array.from({ length: 2 * p }, (_, b) => {
          if (b >= p) return b - p === a ? 1 : 0;
          let sum = times * row[a] * row[b];
          for (let k = 0; k < rows; k++) sum += jacobian[k * p + a] * jacobian[k * p + b];
          return sum;
        }),
      );
      for (let c = 0; c < p; c++) {
        const pivot = A[c][c];
        A[c] = A[c].map((v) => v / pivot);
        for (let r = 0; r < p; r++) if (r !== c) A[r] = A[r].map((v, b) => v - A[r][c] * A[c][b]);
      }
      return A[0][p];
    };
    const half = (t: number, variance: number) => 2 * t * Math.sqrt(variance);
    const t = (times: number) => precision.width(goal, candidate, times)! / half(1, varianceOf(times));
    // t falls with every scan, towards the normal quantile.
    const quantiles = [0, 1, 2, 5, 20].map(t);
    expect(quantiles).toEqual([...quantiles].sort((a, b) => b - a));
    expect(quantiles[0]).toBeLessThan(studentQuantile(0.975, 3));
    expect(quantiles[4]).toBeGreaterThan(studentQuantile(0.975, 1e4));
    expect(quantiles[4]).toBeLessThan(studentQuantile(0.975, 9));
    // An instrument that the fit does not know can say nothing yet.
    expect(precision.width(goal, { instrument: 'other', rateKPerS: 1 })).toBeUndefined();
  });
  test('five scans leave the bent law one degree of freedom: no advice on what is read from it', () => {
    const few = { ...two(), scans: two().scans.slice(0, 5) };
    expect(analyseForAdvice(few)).toBeUndefined();
    expect(adviseScans(few)).toEqual([]);
  });
});
