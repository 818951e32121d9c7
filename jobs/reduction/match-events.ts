import type { ReducedEvent } from '../../schema/wire/reduced.ts';

/** What is needed of a scan to tell which of its events is which. */
export interface MatchScan {
  /** Anything that names the scan */
  key: string;
  events: readonly Pick<ReducedEvent, 'kind' | 'rateKPerS' | 'peakK' | 'widthK' | 'area'>[];
}

/** Number of each event over all scans of a sample, 1-based: `numbers[scan][i]` belongs to `scans[scan].events[i]`. */
export interface EventMatching {
  numbers: number[][];
  /** Scans with fewer events than the sample has, or more */
  odd: string[];
}

/** Cost of an event left without a partner: so many widths off its place. */
const UNMATCHED = 3;
/** Twice or half the usual share of the area costs as much as this many widths off. */
const SHARE_WEIGHT = 0.5;
/** Shift of a peak per decade of rate where the events themselves cannot tell it: R T ln 10/E at E/(R T) = 40, part of T. */
const USUAL_SHIFT_PART = 0.06;

/**
 * Numbers events alike across rates and instruments: order in temperature, share of the area, and shift with rate. The
 * heating scans with the most common number of events tell where each event lies against ln β (straight line in 1/T); every other scan's
 * events are put, in order, to the numbers that fit best. Holds and coolings are numbered by order alone.
 */
export function matchEvents(scans: readonly MatchScan[]): EventMatching {
  const numbers = scans.map(({ events }) => events.map((_, i) => i + 1));
  const heating = scans.map((scan, at) => ({ ...scan, at })).filter(({ events }) => events[0]?.kind === 'heating');
  const counts = new Map<number, number>();
  for (const { events } of heating) counts.set(events.length, (counts.get(events.length) ?? 0) + 1);
  // The most common number; of equals the larger, since an event is missed more easily than invented.
  const usual = [...counts].sort((a, b) => b[1] - a[1] || b[0] - a[0])[0]?.[0] ?? 0;
  const odd = heating.filter(({ events }) => events.length !== usual);
  if (odd.length === 0 || usual === 0) return { numbers, odd: [] };
  const lines = Array.from({ length: usual }, (_, k) =>
    lineOf(
      heating.filter((s) => s.events.length === usual),
      k,
    ),
  );
  for (const scan of odd) {
    const total = scan.events.reduce((sum, e) => sum + e.area, 0);
    const cost = scan.events.map((e) =>
      lines.map((line) => {
        const expected = line.peakAt(Math.log(e.rateKPerS));
        const apart = (e.peakK - expected) / (e.widthK || 1);
        const share = Math.log2(e.area / total / line.share);
        return Math.abs(apart) + SHARE_WEIGHT * Math.min(2, Math.abs(share));
      }),
    );
    numbers[scan.at] = alignInOrder(cost, usual);
  }
  return { numbers, odd: odd.map(({ key }) => key) };
}

/** 1/T of event k against ln β over scans, and its mean share of the area. */
function lineOf(scans: readonly MatchScan[], k: number): { peakAt: (lnRate: number) => number; share: number } {
  const x = scans.map(({ events }) => Math.log(events[k].rateKPerS));
  const y = scans.map(({ events }) => 1 / events[k].peakK);
  const [mx, my] = [x, y].map((v) => v.reduce((a, b) => a + b, 0) / v.length);
  const sxx = x.reduce((sum, v) => sum + (v - mx) ** 2, 0);
  const sxy = x.reduce((sum, v, i) => sum + (v - mx) * (y[i] - my), 0);
  const usual = -(USUAL_SHIFT_PART / Math.LN10) * my;
  const slope = sxx > 0.1 ? sxy / sxx : usual;
  const share =
    scans.reduce((sum, { events }) => sum + events[k].area / events.reduce((a, e) => a + e.area, 0), 0) / scans.length;
  return { peakAt: (lnRate) => 1 / (my + slope * (lnRate - mx)), share };
}

/** Cheapest assignment that keeps the order; events that fit nowhere get numbers beyond the usual ones. */
function alignInOrder(cost: number[][], usual: number): number[] {
  const n = cost.length;
  // best[i][k]: cheapest way to place events i… on numbers k…; move: place, leave the event out, or skip the number.
  const best = Array.from({ length: n + 1 }, () => new Float64Array(usual + 1));
  for (let i = n; i >= 0; i--) {
    for (let k = usual; k >= 0; k--) {
      if (i === n) continue;
      const out = UNMATCHED + best[i + 1][k];
      const skip = k < usual ? best[i][k + 1] : Number.POSITIVE_INFINITY;
      const place = k < usual ? cost[i][k] + best[i + 1][k + 1] : Number.POSITIVE_INFINITY;
      best[i][k] = Math.min(out, skip, place);
    }
  }
  const numbers: number[] = [];
  let extra = usual;
  let k = 0;
  for (let i = 0; i < n; i++) {
    while (k < usual && best[i][k] === best[i][k + 1]) k++;
    if (k < usual && best[i][k] === cost[i][k] + best[i + 1][k + 1]) numbers.push(++k);
    else numbers.push(++extra);
  }
  return numbers;
}
