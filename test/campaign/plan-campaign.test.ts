import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { planCampaign } from '../../jobs/campaign/index.ts';
import type { CoverageScan } from '../../schema/wire/campaign.ts';
import { FLAG_CODES } from '../../schema/wire/flags.ts';

// The rules are the project's own; the table below states them by example.
const furnace = { instrument: 'F', kind: 'furnace', standards: 1 } as const;
const chip = { instrument: 'C', kind: 'chip', standards: 1 } as const;

const scansAt = (rates: number[], instrument = 'F', sample = 'S'): CoverageScan[] =>
  rates.map((rateKPerS) => ({ sample, instrument, rateKPerS }));

const codes = (scans: CoverageScan[], samples = ['S']): string[] =>
  planCampaign({ samples, scans, instruments: [furnace, chip] }).gaps.map((g) => g.code);

describe('gaps of one sample', () => {
  test.each<[string, CoverageScan[], string[]]>([
    ['no scan at all', [], ['few-rates']],
    ['one rate once', scansAt([0.5]), ['few-rates', 'narrow-span', 'no-replicate']],
    ['one rate twice', scansAt([0.5, 0.5]), ['few-rates', 'narrow-span']],
    ['two rates over a factor of ten', scansAt([0.1, 1, 1]), ['few-rates']],
    ['three scans but two distinct rates (1.9 % apart)', scansAt([0.1, 1, 1.019]), ['few-rates']],
    ['three distinct rates (2.1 % apart)', scansAt([0.1, 1, 1.021]), ['no-replicate']],
    ['nothing missing', scansAt([0.1, 0.3, 1, 1]), []],
    ['span of exactly ten', scansAt([0.1, 0.3, 1.0, 1.0]), []],
    ['span of ten within the scatter of measured rates', scansAt([0.1002, 0.3, 0.998, 0.998]), []],
    ['span of nine', scansAt([0.1, 0.3, 0.9, 0.9]), ['narrow-span']],
    ['empty decade 1–10', scansAt([0.5, 0.5, 0.6, 12]), ['decade-gap']],
    ['rates ten apart across two edges leave no empty decade', scansAt([9.99, 9.99, 100.1, 30.2, 1.5]), []],
    ['ten apart by scatter only', scansAt([0.999, 0.999, 0.5, 10.02]), []],
    ['two empty decades', scansAt([0.5, 0.5, 0.2, 150]), ['decade-gap', 'decade-gap']],
    ['instruments joined by a rate', [...scansAt([0.1, 1, 5, 5]), ...scansAt([5.05, 30], 'C')], []],
    ['instruments apart', [...scansAt([0.1, 1, 5, 5]), ...scansAt([20, 80], 'C')], ['instruments-not-bridged']],
    ['a rate on two instruments is no replicate', [...scansAt([0.1, 1, 5]), ...scansAt([5], 'C')], ['no-replicate']],
    ['a hold has no place on the rate axis', scansAt([0, 0, Number.NaN]), ['few-rates']],
    ['cooling counts by magnitude', scansAt([-0.1, -0.3, -1, -1]), []],
  ])('%s', (_, scans, expected) => {
    expect(codes(scans)).toEqual(expected);
  });

  test('a third instrument can join two others', () => {
    const scans = [...scansAt([0.1, 1, 1], 'A'), ...scansAt([1, 8], 'B'), ...scansAt([8, 50], 'C')];
    expect(codes(scans)).toEqual([]);
    expect(codes(scans.filter((s) => s.instrument !== 'B'))).toEqual(['instruments-not-bridged']);
  });

  test('sentences carry the numbers, actions a rate and an instrument', () => {
    const { gaps } = planCampaign({
      samples: ['S'],
      scans: [...scansAt([0.05, 0.5]), ...scansAt([200, 2000, 2000], 'C')],
      instruments: [furnace, chip],
    });
    const text = gaps.map((g) => [g.code, g.detail, g.action]);
    expect(text).toEqual([
      [
        'decade-gap',
        'No scan between 1 and 10 K/s, while there are scans at 0.5 K/s (30 K/min) below and 200 K/s above.',
        'Run about 3 K/s on F.',
      ],
      [
        'decade-gap',
        'No scan between 10 and 100 K/s, while there are scans at 0.5 K/s (30 K/min) below and 200 K/s above.',
        'Run about 30 K/s on C.',
      ],
      [
        'instruments-not-bridged',
        'F (0.05 K/s (3 K/min) to 0.5 K/s (30 K/min)) and C (200 K/s to 2000 K/s) share no heating rate (within 2 %), so an offset between them cannot be told from the material.',
        expect.stringMatching(/^Run one rate on both, as near as they come to 8\.94 K\/s: .*\bF\b.*\bC\b/),
      ],
    ]);
  });

  test('a rate that no instrument of the campaign reaches says what kind would', () => {
    const { gaps } = planCampaign({ samples: ['S'], scans: scansAt([5, 5, 6, 600], 'F'), instruments: [] });
    expect(gaps.find((g) => g.code === 'decade-gap')?.action).toContain(
      'chip calorimeter (none of this campaign does)',
    );
  });
});

describe('instruments', () => {
  test('one row an instrument without a standard, after the samples, by name', () => {
    const { gaps } = planCampaign({
      samples: [],
      scans: [],
      instruments: [{ ...furnace, instrument: 'Z', standards: 0 }, furnace, { ...chip, instrument: 'A', standards: 0 }],
    });
    expect(gaps.map((g) => [g.sample, g.code, /^Instrument (\w)/.exec(g.detail)?.[1]])).toEqual([
      ['', 'no-standard', 'A'],
      ['', 'no-standard', 'Z'],
    ]);
  });
});

describe('coverage', () => {
  test('exact powers of ten open their decade, whatever the last digits', () => {
    for (let k = -6; k <= 6; k++) {
      for (const rate of [10 ** k, Number(`1e${k}`), Number(`1e${k}`) * (1 - 2e-16), (Number(`6e${k + 1}`) / 60) * 1]) {
        const [row] = planCampaign({ samples: [], scans: scansAt([rate]), instruments: [] }).coverage;
        expect([row.decade_low_K_per_s, row.decade_high_K_per_s]).toEqual([Number(`1e${k}`), Number(`1e${k + 1}`)]);
      }
    }
  });

  test('rows by sample, decade, instrument, with counts and distinct rates', () => {
    const scans = [
      ...scansAt([2, 0.2, 2.01], 'F', 'b'),
      ...scansAt([2.02, 300], 'C', 'b'),
      ...scansAt([0.999, 1.001], 'F', 'a'),
    ];
    expect(planCampaign({ samples: [], scans, instruments: [] }).coverage).toEqual([
      // 0.999 and 1.001 are one rate: it stays whole, on the side of its median
      { sample: 'a', decade_low_K_per_s: 1, decade_high_K_per_s: 10, instrument: 'F', scan_count: 2, rates: [1] },
      { sample: 'b', decade_low_K_per_s: 0.1, decade_high_K_per_s: 1, instrument: 'F', scan_count: 1, rates: [0.2] },
      { sample: 'b', decade_low_K_per_s: 1, decade_high_K_per_s: 10, instrument: 'C', scan_count: 1, rates: [2.01] },
      { sample: 'b', decade_low_K_per_s: 1, decade_high_K_per_s: 10, instrument: 'F', scan_count: 2, rates: [2.01] },
      { sample: 'b', decade_low_K_per_s: 100, decade_high_K_per_s: 1000, instrument: 'C', scan_count: 1, rates: [300] },
    ]);
  });

  const anyScan = fc.record({
    sample: fc.constantFrom('a', 'b'),
    instrument: fc.constantFrom('F', 'C', 'D'),
    rateKPerS: fc.double({ min: -3, max: 5, noNaN: true }).map((x) => 10 ** x),
  });

  test('every scan is counted once, every rate lies in its decade, order of arrival does not matter, codes are known', () => {
    fc.assert(
      fc.property(fc.array(anyScan, { maxLength: 25 }), fc.integer(), (scans, seed) => {
        const input = { samples: ['a', 'b'], scans, instruments: [furnace, chip] };
        const plan = planCampaign(input);
        expect(plan.coverage.reduce((n, row) => n + row.scan_count, 0)).toBe(scans.length);
        for (const row of plan.coverage) {
          for (const rate of row.rates) {
            expect(rate).toBeGreaterThanOrEqual(row.decade_low_K_per_s * (1 - 1e-8));
            expect(rate).toBeLessThan(row.decade_high_K_per_s);
          }
        }
        for (const row of plan.gaps) expect(FLAG_CODES).toHaveProperty([row.code]);
        const turned = scans.map((s, i) => [s, (i * 7919 + seed) % 101] as const).sort((x, y) => x[1] - y[1]);
        expect(planCampaign({ ...input, scans: turned.map(([s]) => s) })).toEqual(plan);
      }),
      { seed: 20240607, numRuns: 200 },
    );
  });
});
