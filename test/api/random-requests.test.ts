import { expect, test } from 'vitest';
import { sendRandomRequests } from './random-requests.ts';

const REQUESTS = 3000;
const SEED = 'requests of the suite, anew';

// Property: whoever asks whatever, the answer is one that the document names for the route, in its shape, and none is a failure of ours.
// `npm run study -- requests` sends more.
test(`${REQUESTS} requests drawn from the document (seed «${SEED}»)`, { timeout: 180_000 }, async () => {
  const { failures, troubles, byStatus, met, documented } = await sendRandomRequests(REQUESTS, SEED);
  expect(failures).toEqual([]);
  expect(troubles).toEqual([]);
  // The control: the requests were of many kinds, and most documented answers were met.
  for (const status of [200, 201, 202, 304, 400, 401, 403, 404, 409, 411, 415, 422, 429])
    expect(byStatus.get(status) ?? 0, String(status)).toBeGreaterThan(0);
  expect([...met].filter((m) => documented.has(m)).length).toBeGreaterThan(documented.size / 2);
});
