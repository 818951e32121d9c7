import { createHash } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { FLAG_CODES } from '../../schema/wire/flags.ts';

describe('the demo campaign', () => {
  const demo = buildDemoCampaign();
  const text = (path: string): string => new TextDecoder().decode(demo.files.find((f) => f.path === path)?.bytes);
  const sheetFiles = text('scans.csv')
    .trim()
    .split('\n')
    .slice(1)
    .map((line) => line.split(',')[0]);

  test('is the same on every call', () => {
    const digest = ({ files, truth, flaws, goals }: ReturnType<typeof buildDemoCampaign>) => [
      files.map((f) => [f.path, createHash('sha256').update(f.bytes).digest('hex')]),
      truth,
      flaws,
      goals,
    ];
    expect(digest(buildDemoCampaign())).toEqual(digest(demo));
  });

  test('has three samples of at least eight good scans, two straight and one bent over more than five decades', () => {
    expect(demo.truth.map((t) => [t.sample, t.scanCount >= 8, t.energyKJPerMol])).toEqual([
      ['synthetic-film', true, undefined],
      ['synthetic-ribbon', true, 310],
      ['synthetic-excipient', true, 190],
    ]);
    const [film] = demo.truth;
    const energies = film.localEnergies.map((e) => e.energyKJPerMol);
    expect(energies[0]).toBeGreaterThan(255);
    expect(energies[2]).toBeLessThan(158);
    const rates = text('scans.csv')
      .split('\n')
      .filter((l) => l.includes('synthetic-film'))
      .map((l) => Number(l.split(',')[4]));
    expect(Math.log10(Math.max(...rates) / Math.min(...rates))).toBeGreaterThan(5);
  });

  test('sheets come first and name every file, and every file says that it is synthetic', () => {
    expect(demo.files.slice(0, 5).map((f) => f.path)).toEqual([
      'scans.csv',
      'instruments.csv',
      'samples.csv',
      'goal.csv',
      'programs/warm-store-one-year.csv',
    ]);
    const data = demo.files.slice(5);
    expect(data.map((f) => f.path).sort()).toEqual([...sheetFiles].sort());
    for (const { path, bytes } of data) {
      const wide = new TextDecoder('utf-16le').decode(bytes.subarray(0, 400));
      const narrow = new TextDecoder('latin1').decode(bytes.subarray(0, 400));
      expect(`${wide}${narrow}`, path).toContain('SYNTHETIC');
      expect(path).toMatch(/^synthetic-/);
    }
  });

  test('plants a missing decade, a wrong rate, a scan without a sign and a damaged file, by codes that exist', () => {
    expect(demo.flaws.map((f) => f.code)).toEqual([
      'decade-gap',
      'instruments-not-bridged',
      'rate-off-nominal',
      'sign-inferred',
      'file-damaged',
    ]);
    for (const flaw of demo.flaws) {
      expect(FLAG_CODES).toHaveProperty([flaw.code]);
      if (flaw.file) expect(sheetFiles).toContain(flaw.file);
    }
  });

  test('the answers to its goals are those of the laws that were put in', () => {
    const goal = (i: number) => demo.goals[i];
    // By hand: an event of E = 190 kJ/mol, n = 2.5 that peaks at 395 K at 10 K/min, ln β = ln K + ln(R T²/E); t = [−ln(1 − α)]^(1/n)/K(T).
    const lnK = (E: number, peakK: number, T: number) =>
      Math.log(((10 / 60) * E) / (8.31446261815324 * peakK ** 2)) - (E / 8.31446261815324) * (1 / T - 1 / peakK);
    const time = (a: number, n: number, lnRate: number) => (-Math.log1p(-a)) ** (1 / n) * Math.exp(-lnRate);
    expect(goal(0).value / time(0.01, 2.5, lnK(190e3, 395, 313.15))).toBeCloseTo(1, 9);
    expect(goal(0).answer).toBe('met');
    expect(goal(1).value / time(0.01, 2.5, lnK(190e3, 395, 333.15))).toBeCloseTo(1, 9);
    expect(goal(1).answer).toBe('not_met');
    expect(time(0.01, 3, lnK(310e3, 722, goal(4).value + 273.15)) / 3600).toBeCloseTo(1, 6);
    // The year: ∫K dt by the trapezoid rule over the rows of the file cut into 400; the file has the temperatures to 0.01 °C.
    const rows = text('programs/warm-store-one-year.csv').trim().split('\n').slice(1);
    const [hours, celsius] = [0, 1].map((c) => rows.map((row) => Number(row.split(',')[c])));
    let integral = 0;
    for (let i = 1; i < rows.length; i++)
      for (let k = 0; k < 400; k++) {
        const rate = (part: number) =>
          Math.exp(lnK(190e3, 395, celsius[i - 1] + part * (celsius[i] - celsius[i - 1]) + 273.15));
        integral += (((hours[i] - hours[i - 1]) * 3600) / 400) * ((rate(k / 400) + rate((k + 1) / 400)) / 2);
      }
    expect(hours.at(-1)).toBe(365 * 24);
    expect(goal(2).value / -Math.expm1(-(integral ** 2.5))).toBeCloseTo(1, 4);
    expect(new Set(demo.goals.map((g) => g.answer))).toEqual(new Set(['met', 'not_met', undefined]));
  });
});
