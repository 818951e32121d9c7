import { describe, expect, test } from 'vitest';
import { hasLaboratories, reduceLaboratories } from './laboratories.ts';

// The whole table: `npm run study -- laboratories`. Around 105 °C at 10 K/min is the usual value of PMMA (common practice, no source).
describe.skipIf(!hasLaboratories())('measured PMMA scans (beside the checkout)', () => {
  const scans = reduceLaboratories();
  const midpoints = (laboratory: string, rate?: number) =>
    scans
      .filter((s) => s.laboratory === laboratory && (rate === undefined || s.ratePerMin === rate))
      .flatMap((s) => s.midpointK ?? []);

  test('all are read; the glass transition of two laboratories is found in every scan and agrees within 5 K at each rate', () => {
    expect(scans.length).toBe(21);
    expect(scans.every((s) => s.rows > 100)).toBe(true);
    const found = [...midpoints('FSRI'), ...midpoints('UMET')];
    expect(found.length).toBe(15);
    expect(Math.min(...found)).toBeGreaterThan(386);
    expect(Math.max(...found)).toBeLessThan(403);
    const mean = (values: number[]) => values.reduce((a, b) => a + b, 0) / values.length;
    for (const rate of [3, 10, 20])
      expect(Math.abs(mean(midpoints('FSRI', rate)) - mean(midpoints('UMET', rate)))).toBeLessThan(5);
  });

  // Their heat flow falls by 0.03 to 0.6 W/g around 410 K, against the direction of a glass transition, on a drift steeper than any step.
  test('the third laboratory’s scans show no endothermic step there, and every one says so', () => {
    expect(midpoints('Sandia')).toEqual([]);
    for (const { laboratory, doubt } of scans) expect(doubt === undefined).toBe(laboratory !== 'Sandia');
  });
});
