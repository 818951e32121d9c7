import { describe, expect, test } from 'vitest';
import { readExponent } from '../../jobs/kinetics/avrami/exponent-reading.ts';
import { fitArrhenius } from '../../jobs/kinetics/avrami/hold-series.ts';
import { fitSample } from '../../jobs/kinetics/index.ts';
import { fitAugisBennett } from '../../jobs/kinetics/peak-methods.ts';
import { fitLine } from '../../jobs/numeric/line.ts';
import { mean } from '../../jobs/numeric/statistics.ts';
import type { FitResult, FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { SourceName } from '../validation/sources.ts';
import { validate } from '../validation/validate.ts';
import { exactHold } from './exact-programmes.ts';
import { peakTable } from './peak-table.ts';

// Sets with their printed energies; "apart" marks numbers computed outside this project from the printed table (ordinary least squares).

const furnace: InstrumentCalibration = {
  instrument: 'furnace',
  kind: 'furnace',
  source: 'sheet',
  offsetK: 0,
  offsetSeK: 0.1,
  lagS: 0,
  lagSeS: 0,
  responseS: 0,
  standards: 0,
};
const fitOf = (scans: FitScan[]): FitResult =>
  fitSample({ sample: 's', scans, instruments: [furnace], seed: '01', draws: 20 });
const codes = (f: FitResult) => f.flags.map((v) => v.code);
const energy = (f: FitResult, method: string) =>
  f.parameters.find((p) => p.quantity === 'activation_energy' && p.method === method && p.interval === 'monte_carlo')!
    .value;
const kelvin = (celsius: number[]) => celsius.map((c) => c + 273.15);
const traps = ['rate-independent', 'onset-above-peak', 'series-not-monotonic'];

describe('tables of peaks: Kissinger, Boswell and Starink of the whole fit against the same lines computed apart, kJ/mol', () => {
  const ge = [5, 10, 20];
  const sr = [10, 20, 30, 40];
  const fourRates = [5, 10, 15, 20];
  test.each<[string, SourceName, number[], number[], number, number, number]>([
    [
      'Ge10Se75Sb15 (10.1016/j.jnoncrysol.2014.03.029, printed 162.24)',
      'geSbSeApart',
      fourRates,
      [527.5, 535.7, 542.3, 546.8],
      162.253,
      166.717,
      162.48,
    ],
    [
      'Ge-Ga-Se, x = 0 (10.1016/S0022-3093(01)01127-9, printed 147)',
      'geGaSeApart',
      ge,
      kelvin([452, 473, 494]),
      140.228,
      146.428,
      140.612,
    ],
    ['Ge-Ga-Se, x = 0.2 (printed 150)', 'geGaSeApart', ge, kelvin([465, 485, 507]), 145.399, 151.708, 145.787],
    ['Ge-Ga-Se, x = 0.5 (printed 174)', 'geGaSeApart', ge, kelvin([476, 490, 513]), 167.774, 174.159, 168.15],
    ['Ge-Ga-Se, x = 0.7 (printed 222)', 'geGaSeApart', ge, kelvin([471, 483, 500]), 214.266, 220.575, 214.599],
    [
      'Zr54Cu46, Tp1 (10.1016/S0022-3093(02)01326-1, printed about 125)',
      'zrCuApart',
      fourRates,
      [695.2, 700.7, 705.4, 711.3],
      341.646,
      347.493,
      341.841,
    ],
    [
      'Ni50Ti50 film (10.1016/j.jnoncrysol.2007.01.006, printed 411)',
      'niTiApart',
      [5, 10, 30, 40, 50],
      [808, 812.5, 831.5, 836.6, 840.5],
      361.971,
      368.819,
      362.229,
    ],
    [
      'Li-Ti phosphate Gbase (10.1016/j.jnoncrysol.2014.10.023, printed 641)',
      'liTiApart',
      fourRates,
      kelvin([620, 636, 639, 643]),
      380.107,
      387.621,
      380.404,
    ],
    [
      'Li-Ti phosphate GFe-5 (printed 288)',
      'liTiApart',
      fourRates,
      kelvin([600, 607, 615, 624]),
      352.422,
      359.781,
      352.729,
    ],
    [
      'Sr borosilicate S1 (10.1016/j.ssi.2009.12.005, printed 334)',
      'srApart',
      sr,
      kelvin([825, 848, 862, 867]),
      312.297,
      321.596,
      312.791,
    ],
    ['Sr borosilicate S2 (printed 295)', 'srApart', sr, kelvin([807, 830, 836, 846]), 342.823, 351.955, 343.279],
    ['Sr borosilicate S3 (printed 346)', 'srApart', sr, kelvin([808, 820, 835, 850]), 305.189, 314.351, 305.678],
  ])('%s', (name, source, rates, peaks, kissinger, boswell, starinkLine) => {
    const fit = fitOf(peakTable(rates, peaks));
    const given = { quantity: `E of ${name.replace(/ \(.*/, '')}, whole fit, kJ/mol`, source };
    const check = (method: string, expected: number, within: number) =>
      validate({ ...given, method, expected, got: energy(fit, method), within });
    check('kissinger', kissinger, 0.005);
    check('boswell', boswell, 0.005);
    // Ozawa–Flynn–Wall as corrected and Starink's line estimate the same E: to 0.5 %.
    check('ozawa_flynn_wall', starinkLine, 0.005 * starinkLine);
    for (const code of traps) expect(codes(fit)).not.toContain(code);
    // The rows the table cannot give are missing, never NaN.
    for (const p of fit.parameters) expect(Number.isFinite(p.value)).toBe(true);
  });
  test('GFe-5: the correlation of Kissinger’s line is −0.967 (printed −0.965 for it and −0.967 for ln β): the scatter is that of the table', () => {
    const T = kelvin([600, 607, 615, 624]);
    const x = T.map((v) => 1 / v);
    const y = [5, 10, 15, 20].map((b, i) => Math.log(b / T[i] ** 2));
    const { residuals } = fitLine(x, y);
    const total = y.reduce((s, v) => s + (v - mean(y)) ** 2, 0);
    const r = -Math.sqrt(1 - residuals.reduce((s, v) => s + v * v, 0) / total);
    const quantity = 'correlation of the line, Li-Ti phosphate GFe-5';
    validate({ method: 'kissinger', quantity, source: 'liTi', expected: -0.967, got: r, within: 5e-4 });
  });
  test('Ni50Ti50: Augis–Bennett with the onset in the place of T0 gives 214.44 (apart), not the printed 315', () => {
    const { energy: E } = fitAugisBennett(
      [5, 10, 30, 40, 50],
      [808, 812.5, 831.5, 836.6, 840.5],
      [801.9, 805.6, 817.5, 823.5, 825.5],
    );
    const quantity = 'E of Ni50Ti50 with the onset as T0, kJ/mol';
    validate({
      method: 'augis_bennett',
      quantity,
      source: 'niTiApart',
      expected: 214.442,
      got: E / 1e3,
      within: 0.005,
    });
  });
});

describe('traps are told, not fitted in silence', () => {
  test('Zr54Cu46, second peak at 1006 K (10.1016/S0022-3093(02)01326-1): no dependence on rate, no energy', () => {
    const fit = fitOf(peakTable([5, 10, 15, 20], [1006.9, 1006.1, 1006.1, 1006.9]));
    expect(fit.state).toBe('insufficient');
    expect(fit.parameters).toEqual([]);
    expect(codes(fit)).toContain('rate-independent');
    expect(fit.reason).toMatch(/does not rise with heating rate/);
    expect(fit.reports[0]).toMatchObject({ method: 'kissinger', converged: false });
  });
  test('Ge-Ga-Se, x = 0.5 (10.1016/S0022-3093(01)01127-9): 167.8 with a standard error of 23.1 (apart) on three rates is not determined', () => {
    // t(0.975, 1) = 12.706 (NIST/SEMATECH e-Handbook 1.3.6.7.2): ± 293 kJ/mol.
    const told = fitOf(peakTable([5, 10, 20], kelvin([476, 490, 513]))).flags.find(
      (f) => f.code === 'energy-undetermined',
    );
    expect(told?.detail).toMatch(/168 kJ\/mol.*± 293/);
    const sure = fitOf(peakTable([5, 10, 20], kelvin([452, 473, 494])));
    expect(codes(sure)).not.toContain('energy-undetermined');
  });
  test('Zr54Cu46 at 15 K/min: the printed Tx 706.4 lies above the printed peak 705.4', () => {
    const fit = fitOf(peakTable([5, 10, 15, 20], [695.2, 700.7, 705.4, 711.3], [689.5, 697.2, 706.4, 708.0]));
    const told = fit.flags.filter((f) => f.code === 'onset-above-peak');
    expect(told.map((f) => f.file)).toEqual(['row-3']);
    expect(told[0].detail).toMatch(/706\.4.*705\.4/);
  });
  test('Sr borosilicate S2 (10.1016/j.ssi.2009.12.005): Tc falls from 800 to 790 °C between 20 and 30 K/min; S1 and S3 rise', () => {
    const rates = [10, 20, 30, 40];
    const s2 = fitOf(peakTable(rates, kelvin([807, 830, 836, 846]), kelvin([757, 800, 790, 804])));
    expect(s2.flags.filter((f) => f.code === 'series-not-monotonic').map((f) => f.detail)).toEqual([
      expect.stringMatching(/onset falls from 1073\.\d K at 20\.0 K\/min to 1063\.\d K at 30\.0 K\/min/),
    ]);
    const s1 = fitOf(peakTable(rates, kelvin([825, 848, 862, 867]), kelvin([785, 807, 820, 828])));
    const s3 = fitOf(peakTable(rates, kelvin([808, 820, 835, 850]), kelvin([760, 780, 790, 806])));
    for (const f of [s1, s3]) expect(codes(f)).not.toContain('series-not-monotonic');
  });
  test('Zr55 glass, inflection of Tg (10.1016/j.ssc.2005.03.052): 722 K at 20 and 720 K at 30 K/min do not rise', () => {
    expect(codes(fitOf(peakTable([10, 15, 20, 30], [701, 706, 722, 720])))).toContain('series-not-monotonic');
    expect(codes(fitOf(peakTable([10, 15, 20, 30], [706, 714, 724, 725])))).not.toContain('series-not-monotonic');
  });
});

describe('isothermal sets', () => {
  const series = (rows: [T: number, lnK: number, n: number][]) =>
    rows.map(([T, lnK, n], i) => exactHold(0, lnK, n, T, 0.1, `hold-${i + 1}`));
  test('Ni50Ti50 film (10.1016/j.jnoncrysol.2007.01.006): 429.75 from the printed k (printed 424); with K = k^(1/n) less than half', () => {
    const T = [793, 798, 803, 813, 823];
    const k = [0.0021, 0.0078, 0.012, 0.0198, 0.031];
    const n = [2.63, 2.73, 2.86, 3.01, 3.12];
    const line = (lnRate: (i: number) => number) =>
      fitArrhenius(T.map((temperatureK, i) => ({ temperatureK, fit: { lnRate: lnRate(i) } })));
    const asPrinted = line((i) => Math.log(k[i]));
    const given = { method: 'jmak_isothermal', source: 'niTiApart', within: 0.05 } as const;
    validate({ ...given, quantity: 'E of Ni50Ti50 from k, kJ/mol', expected: 429.75, got: asPrinted.energy / 1e3 });
    const error = asPrinted.energyError / 1e3;
    validate({ ...given, quantity: 'its standard error, kJ/mol', expected: 103.75, got: error });
    // If the law is exp(−k tⁿ), ln k gives n times the energy: the caution that belongs beside the printed number.
    const E = line((i) => Math.log(k[i]) / n[i]).energy / 1e3;
    expect(E).toBeLessThan(429.75 / 2);
    expect(codes(fitOf(series(T.map((t, i) => [t, Math.log(k[i]), n[i]]))))).not.toContain('energy-undetermined');
  });
  test('fluoroindate glass (10.1016/S0022-3093(00)00800-6): ln k −6.94, −6.61, −7.23 gives no energy but the reasons (printed 210)', () => {
    const fit = fitOf(
      series([
        [663.15, -6.94, 4.5],
        [673.15, -6.61, 4.7],
        [683.15, -7.23, 4.6],
      ]),
    );
    expect(codes(fit)).toEqual(expect.arrayContaining(['series-not-monotonic', 'energy-undetermined']));
    expect(fit.parameters.some((p) => p.quantity === 'activation_energy')).toBe(false);
    expect(fit.reports.filter((r) => !r.converged).map((r) => r.method)).toEqual(
      expect.arrayContaining(['jmak_isothermal', 'vyazovkin']),
    );
    // The exponents do not need it.
    const n = fit.parameters.filter((p) => p.quantity === 'avrami_exponent' && p.interval === 'student_t');
    expect(n.slice(0, 3).map((p) => [p.temperature_K, Math.round(p.value * 1e4) / 1e4])).toEqual([
      [663.15, 4.5],
      [673.15, 4.7],
      [683.15, 4.6],
    ]);
  });
  test('copolyester from the melt (PMC7033981, table 2, BA/BI = 9/1): the rate falls with temperature, said with a negative energy', () => {
    const rows: [number, number, number, number][] = [
      [18, 1.65, 6.442, 0.22],
      [20, 1.92, 6.0223, 0.27],
      [22, 1.86, 4.722, 0.3],
      [24, 2.07, 2.8074, 0.42],
      [26, 2.43, 0.6336, 0.84],
      [28, 2.33, 0.0991, 1.87],
      [30, 2.39, 0.0299, 3.01],
      [32, 2.37, 0.009, 5.07],
      [34, 2.17, 0.0046, 8.28],
    ];
    const holds = series(rows.map(([c, n, K]) => [c + 273.15, Math.log(K) / n - Math.log(60), n]));
    const fit = fitOf(holds);
    expect(codes(fit)).toContain('negative-energy');
    expect(energy(fit, 'jmak_isothermal')).toBeLessThan(-100);
    expect(energy(fit, 'vyazovkin')).toBeLessThan(-100);
    // The printed half times are measured: the law's differ by 17.7 to 23.8 % (apart: 0.2589 … 10.086 min).
    rows.forEach(([, n, K, printed]) => {
      const deviation = (Math.LN2 / K) ** (1 / n) / printed - 1;
      expect(deviation).toBeGreaterThan(0.176);
      expect(deviation).toBeLessThan(0.24);
    });
  });
  test('types of nucleation and growth by exponent (Christian 1975, table IX, from memory)', () => {
    expect(readExponent(4)).toMatch(/three dimensions at a constant nucleation rate/);
    expect(readExponent(3)).toMatch(/nuclei already there, or in two at a constant/);
    expect(readExponent(1.5)).toMatch(/by diffusion in three dimensions from nuclei already there/);
    expect(readExponent(3.5)).toMatch(/falls in time/);
    expect(readExponent(5)).toMatch(/rises in time/);
    expect(readExponent(2.7)).toMatch(/cannot tell them apart/);
  });
});

describe('values of E(α) in print', () => {
  test('PEG fumarate copolymer (10.1155/2022/3514358, table 3): means 251 and 241 as printed; both vary by far more than 10 %', () => {
    const kas = [268, 297, 290, 281, 279, 286, 274, 264, 254, 250, 245, 233, 229, 222, 215, 214, 218, 223, 233];
    const friedman = [296, 324, 292, 265, 284, 273, 248, 239, 219, 197, 209, 214, 199, 201, 188, 219, 225, 230, 249];
    const given = { source: 'pegFumarate', within: 0.5 } as const;
    const quantity = 'mean of the printed E(α), PEG fumarate, kJ/mol';
    validate({ ...given, method: 'kissinger_akahira_sunose', quantity, expected: 251, got: mean(kas) });
    validate({ ...given, method: 'friedman', quantity, expected: 241, got: mean(friedman) });
    for (const E of [kas, friedman]) {
      const middle = E.slice(1, 18);
      expect((Math.max(...middle) - Math.min(...middle)) / mean(middle)).toBeGreaterThan(0.1);
    }
  });
  test('K-Rb-Sb-S glass (10.1016/j.jnoncrysol.2008.03.020): mean mE over mean n is 261.1 (printed 261.9): m = n', () => {
    const got = mean([700.9, 672.1, 695.7, 681.5]) / mean([2.7, 2.6, 2.6]);
    const quantity = 'mean mE over mean n, K-Rb-Sb-S glass, kJ/mol';
    validate({ method: 'matusita_sakka', quantity, source: 'kRbSbS', expected: 261.1, got, within: 0.05 });
  });
});
