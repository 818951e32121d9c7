import type { CoverageRow, CoverageScan, GapRow } from '../../schema/wire/campaign.ts';
import { KIND_RATES, type PlannedInstrument, reachOfInstruments } from './instrument-choice.ts';
import { compareText, decadeOf, decadeStart, groupByRate, type RateGroup } from './rates.ts';
import { findSampleGaps } from './sample-gaps.ts';

export interface CampaignInput {
  /** Every sample of the campaign, also those without a scan. */
  samples: readonly string[];
  /** Sample scans (no standards, no blanks); rates in K/s. */
  scans: readonly CoverageScan[];
  instruments: readonly PlannedInstrument[];
}

export interface CampaignPlan {
  coverage: CoverageRow[];
  gaps: GapRow[];
}

/**
 * Which decades of heating rate each sample has been measured in, and what is missing.
 *
 * Coverage: one row a sample, decade [10^k, 10^(k+1)) of K/s and instrument, in that order. Rates within 2 % of each
 * other are one rate, shown by the median of their scans; a rate stays whole on one side of a decade's edge.
 * Gaps: by sample, then in the order of `findSampleGaps`; at the end one `no-standard` row an instrument without a scan of a standard.
 */
export function planCampaign({ samples, scans, instruments }: CampaignInput): CampaignPlan {
  const names = [...new Set([...samples, ...scans.map((s) => s.sample)])].sort(compareText);
  const reaches = reachOfInstruments(instruments, scans);
  const coverage: CoverageRow[] = [];
  const gaps: GapRow[] = [];
  for (const sample of names) {
    const groups = groupByRate(scans.filter((s) => s.sample === sample));
    coverage.push(...coverageOf(sample, groups));
    gaps.push(...findSampleGaps(sample, groups, reaches));
  }
  for (const { instrument, kind, standards } of reaches) {
    if (standards > 0) continue;
    const [low, high] = KIND_RATES[kind];
    gaps.push({
      sample: '',
      code: 'no-standard',
      detail: `Instrument ${instrument} (${kind}) has 0 scans of a standard: its offset and lag rest on the sheet or on a prior.`,
      action: `Run a pure metal that melts near the events on ${instrument} at two or more rates (${kind}: usually between ${low} and ${high} K/s) and list it with role standard.`,
    });
  }
  return { coverage, gaps };
}

function coverageOf(sample: string, groups: readonly RateGroup[]): CoverageRow[] {
  const rows = new Map<string, CoverageRow>();
  for (const { rateKPerS, scans } of groups) {
    const decade = decadeOf(rateKPerS);
    for (const { instrument } of scans) {
      const key = JSON.stringify([decade, instrument]);
      let row = rows.get(key);
      if (!row) {
        row = {
          sample,
          decade_low_K_per_s: decadeStart(decade),
          decade_high_K_per_s: decadeStart(decade + 1),
          instrument,
          scan_count: 0,
          rates: [],
        };
        rows.set(key, row);
      }
      row.scan_count++;
      if (row.rates.at(-1) !== rateKPerS) row.rates.push(rateKPerS);
    }
  }
  return [...rows.values()].sort(
    (a, b) => a.decade_low_K_per_s - b.decade_low_K_per_s || compareText(a.instrument, b.instrument),
  );
}
