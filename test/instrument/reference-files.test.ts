import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { readScan } from '../../jobs/instrument/index.ts';

/**
 * Measured scans of poly(methyl methacrylate) that stand beside the checkout (their origin and licence: SOURCE.json there).
 * The expected first and last numbers come from a reading of the text that shares nothing with the reader.
 */
const folder = new URL('../../../shared/reference/raw/pmma-dsc/', import.meta.url);
const present = existsSync(folder);
const files = present ? readdirSync(folder).filter((name) => name.endsWith('.csv')) : [];

describe.skipIf(!present)(
  `measured scans${present ? '' : ' (skipped: ../shared/reference/raw is not beside the checkout)'}`,
  () => {
    it('are there', () => expect(files.length).toBeGreaterThanOrEqual(20));

    it.each(files)('%s reads with its units and every row', (name) => {
      const bytes = readFileSync(new URL(name, folder));
      const outcome = readScan(bytes, name);
      if (!outcome.ok) throw new Error(outcome.refusal.reason);
      const { scan } = outcome;
      const rows = bytes
        .toString('utf8')
        .trim()
        .split('\n')
        .slice(2)
        .map((line) => line.split(',').map(Number));
      expect(scan.timeS.length).toBe(rows.length);
      expect(scan.heatFlowUnit).toBe('W/kg');
      expect(scan.columns.map((column) => column.unit)).toEqual([
        's',
        'K',
        name.startsWith('Sandia') ? 'W/g' : 'mW/mg',
      ]);
      for (const i of [0, 7, rows.length - 1]) {
        expect(scan.timeS[i]).toBe(rows[i][0]);
        expect(scan.temperatureK[i]).toBe(rows[i][1]);
        // 1 W/g = 1 mW/mg = 1000 W/kg
        expect(scan.heatFlow[i]).toBeCloseTo(rows[i][2] * 1000, 9);
      }
    });
  },
);
