import { expect, test } from 'vitest';
import { soak } from './soak.ts';

// The small one; `npm run study -- soak` sends 5 000 scans.
test('senders, workers and kills at once: nothing lost, nothing twice', async () => {
  const result = await soak({ campaigns: 4, scansEach: 10, seed: 'small soak', limitS: 80 });
  expect(result.wrong).toEqual([]);
  expect(result.kills).toBeGreaterThan(0);
  expect(result.readsMs.length).toBeGreaterThan(10);
}, 100_000);
