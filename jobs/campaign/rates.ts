import type { CoverageScan } from '../../schema/wire/campaign.ts';

/** Two rates closer than this, as a fraction, count as one, which is also the bound of `rate-off-nominal`. */
export const SAME_RATE = 0.02;

/** Scans of one sample at one rate. */
export interface RateGroup {
  /** Median of the scans' rates, K/s: the one number by which the group is shown and placed in a decade. */
  rateKPerS: number;
  scans: CoverageScan[];
}

/** floor(log10 rate), with a guard so that 1e-3 and its neighbours in the last digits fall into the decade they open. */
export function decadeOf(rateKPerS: number): number {
  return Math.floor(Math.log10(rateKPerS) + 1e-9);
}

/** 10^decade without the rounding error of a power. */
export function decadeStart(decade: number): number {
  return Number(`1e${decade}`);
}

/**
 * Groups scans by distinct rate, ascending. Cooling rates count by their magnitude. A hold (rate 0) has no place on the
 * rate axis and is left out; so is a scan whose rate is not known (not finite).
 */
export function groupByRate(scans: readonly CoverageScan[]): RateGroup[] {
  const known = scans
    .map((scan) => ({ rate: Math.abs(scan.rateKPerS), scan }))
    .filter(({ rate }) => Number.isFinite(rate) && rate > 0)
    .sort((a, b) => a.rate - b.rate || compareText(a.scan.instrument, b.scan.instrument));
  const groups: { rate: number; scan: CoverageScan }[][] = [];
  for (const item of known) {
    const group = groups.at(-1);
    // Compared with the group's first member, so that a chain of close rates cannot grow without bound.
    if (group && item.rate <= group[0].rate * (1 + SAME_RATE)) group.push(item);
    else groups.push([item]);
  }
  return groups.map((group) => ({
    rateKPerS: median(group.map((g) => g.rate)),
    scans: group.map((g) => g.scan),
  }));
}

/** Median of an ascending, non-empty list. */
function median(sorted: readonly number[]): number {
  const upper = sorted[Math.floor(sorted.length / 2)];
  const lower = sorted[Math.floor((sorted.length - 1) / 2)];
  return lower === upper ? upper : (lower + upper) / 2;
}

/** A rate as text for a sentence: three significant digits, and K/min beside it below 2 K/s, where furnaces are set in K/min. */
export function rateText(rateKPerS: number): string {
  const short = (x: number): string => String(Number(x.toPrecision(3)));
  return rateKPerS < 2 ? `${short(rateKPerS)} K/s (${short(rateKPerS * 60)} K/min)` : `${short(rateKPerS)} K/s`;
}

/** Code-unit order: the same on every machine, unlike a locale's. */
export function compareText(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0;
}
