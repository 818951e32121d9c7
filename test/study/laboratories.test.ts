import { describe, expect, test } from 'vitest';
import { hasLaboratories, reduceLaboratories } from './laboratories.ts';

// The whole table: `npm run study -- laboratories`. Around 105 °C at 10 K/min is the usual value of PMMA (common practice, no source).
describe.skipIf(!hasLaboratories())('measured PMMA scans (beside the checkout)', () => {
  test('all are read; the glass transition of two laboratories agrees within 5 K at 10 and 20 K/min', () => {
    const scans = reduceLaboratories();
    expect(scans.length).toBe(21);
    expect(scans.every((s) => s.rows > 100)).toBe(true);
    for (const rate of [10, 20]) {
      const of = (laboratory: string) =>
        scans.filter((s) => s.laboratory === laboratory && s.ratePerMin === rate).flatMap((s) => s.midpointK ?? []);
      const found = [...of('FSRI'), ...of('UMET')];
      expect(found.length).toBeGreaterThanOrEqual(4);
      expect(Math.min(...found)).toBeGreaterThan(388);
      expect(Math.max(...found)).toBeLessThan(400);
      const mean = (values: number[]) => values.reduce((a, b) => a + b, 0) / values.length;
      expect(Math.abs(mean(of('FSRI')) - mean(of('UMET')))).toBeLessThan(5);
    }
  });
});
