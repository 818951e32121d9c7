import { describe, expect, it } from 'vitest';
import { readScan } from '../../jobs/instrument/index.ts';
import { plainScan } from './scan-text.ts';

const read = (text: string) => readScan(new TextEncoder().encode(text), 'S/I/a.txt');

function flagsOf(text: string): [string, string][] {
  const outcome = read(text);
  if (!outcome.ok) throw new Error(outcome.refusal.reason);
  return outcome.scan.flags.map((f) => [f.code, f.detail]);
}

function reasonOf(text: string): string {
  const outcome = read(text);
  if (outcome.ok) throw new Error('was read');
  expect(outcome.refusal.code).toBe('file-damaged');
  return outcome.refusal.reason;
}

describe('bad rows', () => {
  const bad = (rows: number, at: number[], cells: string[]) =>
    plainScan(rows, (good, i) => (at.includes(i) ? cells : good));

  it('one in a thousand is dropped, with its line', () => {
    expect(flagsOf(bad(1000, [499], ['249.5', 'NaN', '1']))).toEqual([
      ['rows-repaired', '1 of 1000 rows dropped: line 501 «249.5,NaN,1» has no number as temperature: «NaN»'],
    ]);
    const outcome = read(bad(1000, [499], ['249.5', 'NaN', '1']));
    expect(outcome.ok && [outcome.scan.timeS.length, outcome.scan.timeS[499]]).toEqual([999, 250]);
  });

  it('more are too many, and a small file may have none', () => {
    expect(reasonOf(bad(1000, [1, 2], ['1', '', '']))).toBe(
      '2 of 1000 rows are bad, 1 may be (0.1 %): line 3 «1,,» has 1 cells: the temperature is missing; line 4 «1,,» has 1 cells: the temperature is missing',
    );
    expect(reasonOf(bad(400, [100], ['50', 'inf', '1']))).toContain('1 of 400 rows are bad, 0 may be');
    expect(reasonOf(bad(400, [100], ['50', '1', '1', '1']))).toContain('has 4 cells under a header of 3');
    expect(reasonOf(bad(400, [100], ['1e999', '1', '1']))).toContain('line 102');
  });

  it('time that runs backwards or leaps ahead for one row', () => {
    expect(flagsOf(bad(1000, [500], ['0.25', '75', '1']))[0][1]).toContain(
      'line 502 runs backwards to 0.25 s after 249.5 s',
    );
    expect(flagsOf(bad(1000, [500], ['9e9', '75', '1']))[0][1]).toContain(
      'line 502 leaps ahead to 9000000000 s, the next row has 250.5 s',
    );
    expect(reasonOf(plainScan(400, (cells, i) => (i < 200 ? cells : [String(i - 200), ...cells.slice(1)])))).toContain(
      'line 202 runs backwards to 0 s after 99.5 s',
    );
  });

  it('temperatures not above 0 K', () => {
    expect(flagsOf(bad(1000, [10], ['5', '-999', '1']))[0][1]).toMatch(
      /line 12 has -725\.85 K: a temperature must be above 0 K/,
    );
  });

  it('a last line cut short has words of its own', () => {
    const cut = plainScan(400).slice(0, -13);
    expect(reasonOf(cut)).toMatch(
      /^the file ends in the middle of line 401: «199\.5,[\d.]*» has 2 cells: the heat flow is missing$/,
    );
    expect(flagsOf(plainScan(2000).slice(0, -13))[0][1]).toContain(
      'the last line is cut short, the copy may be incomplete',
    );
    // A whole last row without a line end is sound.
    expect(flagsOf(plainScan(400).trimEnd())).toEqual([]);
  });

  it('words between rows are bad rows, words after them a footer', () => {
    const lines = plainScan(400).trimEnd().split('\n');
    expect(reasonOf([...lines.slice(0, 200), 'segment 2', ...lines.slice(200)].join('\n'))).toContain(
      'line 201 «segment 2»',
    );
    const footer = flagsOf([...lines, '', 'End of data', 'operator, none, 3'].join('\n'));
    expect(footer).toEqual([
      ['rows-repaired', '2 lines of text after the last row of numbers left out, from line 403: «End of data»'],
    ]);
  });

  it('blank lines count for line numbers only', () => {
    const lines = plainScan(1000, (cells, i) => (i === 600 ? ['x', 'y', 'z'] : cells)).split('\n');
    expect(flagsOf(lines.join('\n\n'))[0][1]).toContain('line 1203 «x,y,z»');
    expect(flagsOf([...lines.slice(0, 300), ',,', ' ', ...lines.slice(300)].join('\n'))[0][1]).toContain(
      'line 604 «x,y,z»',
    );
  });
});

describe('repeated times', () => {
  it('are averaged, with their lines', () => {
    const text = plainScan(100, (cells, i) => (i === 50 || i === 51 ? ['24.5', '100', String(i)] : cells));
    const outcome = read(text);
    if (!outcome.ok) throw new Error(outcome.refusal.reason);
    expect(outcome.scan.timeS.length).toBe(98);
    // Rows 49, 50, 51 (t = 24.5 s): 29.9 °C and twice 100 °C.
    expect(outcome.scan.temperatureK[49]).toBeCloseTo((29.9 + 200) / 3 + 273.15, 10);
    expect(outcome.scan.heatFlow[49]).toBeCloseTo(1e-3 * ((Number(Math.sin(49 / 40).toFixed(6)) + 101) / 3), 12);
    expect(flagsOf(text)).toEqual([
      ['rows-repaired', '2 of 100 rows repeat the time before them and were averaged with it: lines 52, 53'],
    ]);
    for (let i = 1; i < 98; i++) expect(outcome.scan.timeS[i]).toBeGreaterThan(outcome.scan.timeS[i - 1]);
  });

  it('that leave too few rows are refused', () => {
    expect(reasonOf(plainScan(100, (cells) => ['1', ...cells.slice(1)]))).toContain(
      'only 1 rows of numbers (100 before repeated times were averaged)',
    );
  });
});

describe('a clipped signal', () => {
  const clip = (limit: number) => plainScan(300, ([t, k, q]) => [t, k, String(Math.min(Number(q), limit))]);

  it('is told with its lines', () => {
    // sin(i/40) ≥ 0.9 for asin(0.9) ≤ i/40 ≤ π − asin(0.9): rows 45 to 80, lines 47 to 82; again from i/40 = 2π + …: row 297.
    expect(flagsOf(clip(0.9))).toEqual([
      ['signal-clipped', 'the signal sits at its maximum 0.0009 W for 36 rows (lines 47 to 82)'],
    ]);
  });

  it('at the bottom too; a rounded top, a constant and a coarse signal are none', () => {
    expect(flagsOf(plainScan(300, ([t, k, q]) => [t, k, String(Math.max(Number(q), -0.5))]))[0][1]).toContain(
      'its minimum -0.0005 W',
    );
    expect(flagsOf(plainScan(300))).toEqual([]);
    expect(flagsOf(plainScan(300, ([t, k]) => [t, k, '1.5']))).toEqual([]);
    expect(flagsOf(plainScan(300, ([t, k, q]) => [t, k, Number(q).toFixed(1)]))).toEqual([]);
  });
});
