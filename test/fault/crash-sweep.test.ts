import { expect, test } from 'vitest';
import { sweepCrashes } from './crash-sweep.ts';

// Every 97th write here; `npm run study -- crash` tries every one. After the crash test of SQLite (test/crash9.test, public domain).
test('a process killed in the middle of a write leaves nothing that the next one cannot finish', async () => {
  const { tried, writes, wrong } = await sweepCrashes({ every: 97, from: 7 });
  expect(wrong).toEqual([]);
  expect(writes).toBeGreaterThan(200);
  expect(tried).toBeGreaterThan(2);
}, 120_000);
