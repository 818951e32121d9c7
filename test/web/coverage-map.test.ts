import { describe, expect, test } from 'vitest';
import { createRateScale } from '../../web/charts/rate-scale.ts';
import { layoutStrip, MARK_SIZE, nearestMark } from '../../web/charts/strip-layout.ts';
import type { ScanRow } from '../../web/client/rows.ts';
import { describeMark } from '../../web/model/describe.ts';
import { buildLedger, emptySpans, type LedgerTables } from '../../web/model/ledger.ts';

const UNITS = { temperature: '°C', rate: 'K/s' } as const;

const scan = (file: string, row: Partial<ScanRow> = {}): ScanRow => ({
  file,
  sha256: file,
  sample: 'glass',
  instrument: 'oven',
  role: 'sample',
  event: 1,
  status: 'reduced',
  reason: null,
  rate_nominal_K_per_s: null,
  rate_K_per_s: 1,
  mass_mg: null,
  glass_transition_K: null,
  onset_K: null,
  peak_K: 700,
  end_K: null,
  width_K: null,
  enthalpy_J_per_g: null,
  flags: [],
  segment: 1,
  replicate: null,
  centroid_K: null,
  ...row,
});

const ledgerOf = (scans: ScanRow[], rest: Partial<LedgerTables> = {}) =>
  buildLedger({ scans, coverage: [], gaps: [], flags: [], parameters: [], ...rest }, undefined);

describe('rows and marks', () => {
  test('one mark a scan, however many events it has', () => {
    const [row] = ledgerOf([scan('a'), scan('a', { event: 2, peak_K: 750 }), scan('b'), scan('a', { segment: 3 })]);
    expect(row.marks.map((mark) => [mark.file, mark.rows.length])).toEqual([
      ['a', 2],
      ['b', 1],
      ['a', 1],
    ]);
  });

  test('waiting, reduced and set aside are told apart; replaced and unassigned scans have no mark', () => {
    const [row] = ledgerOf([
      scan('a', { status: 'received' }),
      scan('b', { status: 'read' }),
      scan('c'),
      scan('d', { status: 'set_aside' }),
      scan('e', { status: 'superseded' }),
      scan('f', { status: 'unassigned', sample: null }),
    ]);
    expect(row.marks.map((mark) => mark.look)).toEqual(['hollow', 'hollow', 'full', 'struck']);
  });

  test('the worst flag of any event shows, notes do not', () => {
    const [row] = ledgerOf([scan('a', { flags: ['spike'] }), scan('b'), scan('b', { event: 2, flags: ['event-cut'] })]);
    expect(row.marks.map((mark) => mark.concern)).toEqual([undefined, 'warn']);
  });

  test('standards and blanks stand below the samples', () => {
    const rows = ledgerOf([scan('s', { sample: 'In', role: 'standard' }), scan('a')]);
    expect(rows.map((row) => row.sample)).toEqual(['glass', 'In']);
  });

  test('a name says instrument, rate, state and peak', () => {
    const [row] = ledgerOf([scan('a', { rate_K_per_s: -0.5, flags: ['cooling', 'event-cut'] })]);
    expect(describeMark(row.marks[0], UNITS)).toBe('oven, 0.5\u00a0K/s cooling, reduced, peak 426.9\u00a0°C, flagged');
  });
});

test('empty decades lie between filled ones only, and neighbours make one span', () => {
  const decade = (low: number, count = 1) => ({
    sample: 'glass',
    decade_low_K_per_s: low,
    decade_high_K_per_s: 10 * low,
    instrument: 'oven',
    scan_count: count,
    rates: [],
  });
  expect(emptySpans([decade(0.01), decade(0.1, 0), decade(1), decade(1), decade(1000)])).toEqual([
    { lowKPerS: 0.1, highKPerS: 1, decades: 1 },
    { lowKPerS: 10, highKPerS: 1000, decades: 2 },
  ]);
  expect(emptySpans([])).toEqual([]);
});

describe('axis and piles', () => {
  test('equal factors are equal distances; an unknown rate stands left of the axis', () => {
    const scale = createRateScale([0.1, 1000, null], 600, UNITS);
    expect(scale.x(10) - scale.x(1)).toBeCloseTo(scale.x(1000) - scale.x(100), 9);
    expect(scale.x(null)).toBeLessThan(scale.start);
    expect(scale.x(0.1)).toBeGreaterThan(scale.start);
    expect(scale.x(1000)).toBeLessThan(600);
  });

  test('K/min moves the labels, not the marks', () => {
    const perSecond = createRateScale([0.1, 1000], 600, UNITS);
    const perMinute = createRateScale([0.1, 1000], 600, { ...UNITS, rate: 'K/min' });
    expect(perMinute.x(7)).toBeCloseTo(perSecond.x(7), 9);
    expect(perMinute.decades[0].x).not.toBeCloseTo(perSecond.decades[0].x, 0);
  });

  test('no two marks touch, repeats are piled, each instrument keeps its level', () => {
    const rates = [1, 1.01, 2, 4, 8, 8];
    const [row] = ledgerOf([
      ...rates.map((rate, i) => scan(`a${i}`, { rate_K_per_s: rate })),
      ...rates.map((rate, i) => scan(`b${i}`, { rate_K_per_s: rate, instrument: 'chip' })),
    ]);
    const layout = layoutStrip(row.marks, createRateScale(rates, 600, UNITS));
    expect(layout.placed.map((p) => p.mark)).toEqual(row.marks);
    for (const a of layout.placed) {
      expect(a.y).toBeGreaterThan(MARK_SIZE / 2);
      expect(a.y).toBeLessThan(layout.height - MARK_SIZE / 2);
      for (const b of layout.placed) {
        if (a !== b) expect(Math.hypot(a.x - b.x, a.y - b.y)).toBeGreaterThan(MARK_SIZE);
      }
      expect(nearestMark(layout, a.x + 3, a.y - 3)).toBe(a);
    }
    expect(new Set(layout.placed.map((p) => p.y)).size).toBe(4);
    expect(nearestMark(layout, 2, 2)).toBeUndefined();
  });
});
