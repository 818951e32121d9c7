import type { Verdict } from '../../../schema/wire/verdicts.ts';
import { type BendAnalysis, degreesLeft } from './analyse.ts';
import type { LawData } from './law-fit.ts';

/** A bend of less than this factor in E over the measured span counts as none. */
export const STRAIGHT_WITHIN = Math.log(1.15);
/** Fewer degrees of freedom than this and nothing is decided. */
export const LEAST_DEGREES = 3;
/** With peaks only, a fitted lag that moves a peak by more than this part of its width may be a response, whose shift is not its lag. */
const RESPONSE_PART = 0.1;

export type Reason = 'interval' | 'too-few-scans' | 'interval-wide' | 'peaks-only' | 'fit-failed';

export interface Decision {
  verdict: Verdict;
  reason: Reason;
  /** scans still missing, for `too-few-scans` */
  missing: number;
}

/** How many scans are missing before anything can be decided. */
export const missingScans = (d: LawData): number => Math.max(0, LEAST_DEGREES - degreesLeft(d));

/**
 * `material`: the 99 % interval of the bend excludes 0. No bend: both one-sided tests of |bend| ≥ ln 1.15 reject at 2.5 %, that
 * is, the 95 % interval lies inside (two one-sided tests, Schuirmann 1987, J. Pharmacokin. Biopharm. 15:657).
 * @param widths K, full widths at half maximum of the scans, for peaks only
 */
export function decide(a: BendAnalysis, peaksOnly: boolean, widths: Float64Array): Decision {
  const { data: d, full } = a;
  if (degreesLeft(d) < LEAST_DEGREES)
    return { verdict: 'undecided', reason: 'too-few-scans', missing: missingScans(d) };
  if (a.lower99 > 0 || a.upper99 < 0) {
    const smeared = d.rate.some((b, i) => Math.abs(full.lagS[d.instrument[i]]) * b > RESPONSE_PART * widths[i]);
    if (peaksOnly && smeared) return { verdict: 'undecided', reason: 'peaks-only', missing: 0 };
    return { verdict: 'material', reason: 'interval', missing: 0 };
  }
  if (a.lower95 > -STRAIGHT_WITHIN && a.upper95 < STRAIGHT_WITHIN) {
    return { verdict: a.lagBeyond.straight.some(Boolean) ? 'instrument' : 'straight', reason: 'interval', missing: 0 };
  }
  return { verdict: 'undecided', reason: 'interval-wide', missing: 0 };
}

/** Half width at which an interval about `bend` decides one way or the other. */
export const decidingHalfWidth = (bend: number): number => Math.max(Math.abs(bend), STRAIGHT_WITHIN - Math.abs(bend));
