import { expect, test } from 'vitest';
import { intervalsStudy } from '../study/intervals.ts';
import { roundTripStudy } from '../study/round-trip.ts';
import { standardsStudy } from '../study/standards.ts';
import { leaveTable } from './validate.ts';

// Small runs of the studies of the same names, seeded: the chapter shows them, and the suite notices when a figure moves. Too few to judge by:
// bounds are kept where the studies are tested.
const SEED = 'validation';

test('recovery of E and n', { timeout: 120_000 }, async () => {
  const text = await roundTripStudy({ count: 2, seed: SEED });
  expect(text).toContain('E kissinger');
  leaveTable(`Recovery: 2 samples of 10 scans for each drift (round-trip, seed ${SEED})`, text);
});

test('intervals that hold the truth', { timeout: 180_000 }, async () => {
  const text = await intervalsStudy({ count: 6, seed: SEED });
  expect(text).toContain('pooled');
  leaveTable(`Intervals: 6 samples a setting (intervals, seed ${SEED})`, text);
});

test('calibration from standards', { timeout: 120_000 }, async () => {
  const text = await standardsStudy({ count: 20, seed: SEED });
  expect(text).toContain('offset');
  leaveTable(`Calibration: 20 instruments (standards, seed ${SEED})`, text);
});
