import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { InstrumentRange } from '../../schema/wire/verdicts.ts';
import { KIND_RATES } from './instrument-choice.ts';
import { compareText, SAME_RATE } from './rates.ts';

/** One scan that could be run. */
export interface Candidate {
  instrument: string;
  rateKPerS: number;
}

/** A calorimeter is set in round steps: 1, 2, 5 a decade, a furnace's in K/min, a chip's in K/s. */
const STEPS: readonly number[] = [1, 2, 5];
/** At most this part of an event's width may be smeared by the response for a scan to be worth running. */
const MOST_SMEAR = 1;

/**
 * Every (instrument, rate) that can be run: round rates within what the instrument reaches and the rates already run on it or on another; ordered by instrument, then rate.
 * @param run rates already run on the sample, K/s
 * @param fits false where the scan would be of no use at that rate (smeared, or in the melt)
 */
export function listCandidates(
  instruments: readonly InstrumentCalibration[],
  ranges: readonly InstrumentRange[],
  run: readonly number[],
  fits: (candidate: Candidate) => boolean,
): Candidate[] {
  const out: Candidate[] = [];
  for (const c of [...instruments].sort((a, b) => compareText(a.instrument, b.instrument))) {
    const range = ranges.find((r) => r.instrument === c.instrument);
    const [low, high] = range ? [range.rateMinKPerS, range.rateMaxKPerS] : KIND_RATES[c.kind];
    const unit = c.kind === 'furnace' ? 1 / 60 : 1;
    const rates = [...run];
    for (let decade = -4; decade <= 7; decade++)
      for (const step of STEPS) rates.push(step * Number(`1e${decade}`) * unit);
    rates.sort((a, b) => a - b);
    const kept: number[] = [];
    for (const rate of rates) {
      if (rate < low * (1 - 1e-9) || rate > high * (1 + 1e-9)) continue;
      if (kept.length > 0 && rate <= kept[kept.length - 1] * (1 + SAME_RATE)) continue;
      kept.push(rate);
    }
    for (const rateKPerS of kept)
      if (fits({ instrument: c.instrument, rateKPerS })) out.push({ instrument: c.instrument, rateKPerS });
  }
  return out;
}

/** @param widthK full width at half maximum expected at that rate */
export function isUsable(c: InstrumentCalibration, rateKPerS: number, widthK: number): boolean {
  return (c.responseS ?? Math.max(0, c.lagS)) * rateKPerS <= MOST_SMEAR * widthK;
}
