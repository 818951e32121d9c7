import { expect, test } from 'vitest';
import { type MatchScan, matchEvents } from '../../jobs/reduction/index.ts';

/** Peaks at E/(R T) near 40: each moves by 6 % of T a decade of rate. Shares 0.7 and 0.3. */
const peaks = (rate: number): MatchScan['events'] =>
  [600, 650].map((T, k) => ({
    kind: 'heating',
    rateKPerS: rate,
    peakK: T * (1 + 0.06 * Math.log10(rate)),
    widthK: 10,
    area: k ? 0.3 : 0.7,
  }));

test('scans with all events are numbered by temperature', () => {
  const scans = [0.1, 1, 10].map((rate) => ({ key: `${rate}`, events: peaks(rate) }));
  expect(matchEvents(scans)).toEqual({
    numbers: [
      [1, 2],
      [1, 2],
      [1, 2],
    ],
    odd: [],
  });
});

test('a scan that shows only the second event gets its number, also decades of rate away where it lies under the first', () => {
  const scans = [0.1, 1, 10, 0.01].map((rate) => ({ key: `${rate}`, events: peaks(rate) }));
  // At 0.01 K/s the second event peaks at 572 K, below where the first peaks at 0.1 K/s … 1 K/s.
  scans[3] = { key: 'one', events: [peaks(0.01)[1]] };
  expect(matchEvents(scans)).toEqual({ numbers: [[1, 2], [1, 2], [1, 2], [2]], odd: ['one'] });
});

test('an event too many fits nowhere and gets a number of its own', () => {
  const scans = [0.1, 0.3, 1].map((rate) => ({ key: `${rate}`, events: peaks(rate) }));
  const extra = { ...peaks(1)[1], peakK: 760, area: 0.05 };
  scans.push({ key: 'three', events: [...peaks(1), extra] });
  expect(matchEvents(scans).numbers[3]).toEqual([1, 2, 3]);
});
