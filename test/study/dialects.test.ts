import { expect, test } from 'vitest';
import { readScan } from '../../jobs/instrument/index.ts';
import { drawDialects, seededRandom, writeScan } from './generator/index.ts';

const ROWS = 60;
const MASS = 7.5e-6;
const random = seededRandom('dialects');
const scan = {
  timeS: Float64Array.from({ length: ROWS }, (_, k) => k * 0.75),
  temperatureK: Float64Array.from({ length: ROWS }, (_, k) => 400 + 0.31 * k),
  heatFlowW: Float64Array.from({ length: ROWS }, () => 1e-3 * random.normal()),
};

test('ninety mixed dialects of one scan are read back to the same SI columns', () => {
  drawDialects(90, random).forEach((dialect, k) => {
    const exotherm = random.pick(['up', 'down'] as const);
    const headerWords = k % 3 === 0;
    const bytes = writeScan(scan, { dialect, exotherm, headerWords, massKg: MASS });
    const where = JSON.stringify(dialect);
    const outcome = readScan(bytes, `scan-${k}.txt`);
    expect(outcome.ok || outcome.refusal.reason, where).toBe(true);
    if (!outcome.ok) return;
    const { timeS, temperatureK, heatFlow, heatFlowUnit, flags } = outcome.scan;
    expect(flags, where).toEqual([]);
    expect(outcome.scan.exotherm, where).toBe(headerWords ? exotherm : undefined);
    expect(timeS, where).toHaveLength(ROWS);
    const factor = (exotherm === 'up' ? 1 : -1) * (heatFlowUnit === 'W/kg' ? MASS : 1);
    for (let row = 0; row < ROWS; row++) {
      expect(Math.abs(timeS[row] - timeS[0] - scan.timeS[row]), where).toBeLessThan(1e-6);
      expect(Math.abs(temperatureK[row] - scan.temperatureK[row]), where).toBeLessThan(1e-5);
      expect(Math.abs(factor * heatFlow[row] - scan.heatFlowW[row]), where).toBeLessThan(1e-10);
    }
  });
});
