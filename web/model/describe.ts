import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { formatCount, formatDuration, formatEstimate, formatRate, formatTemperature, type Units } from '../format.ts';
import { methodName, SCAN_STATE_NAMES } from '../words.ts';
import type { ScanMark } from './ledger.ts';

export interface CampaignWords {
  /** One line: where the campaign stands. */
  headline: string;
  /** What is still going on, if anything. */
  work: string;
}

/** Where a campaign stands, in words. */
export function describeCampaign(status: CampaignStatus): CampaignWords {
  const scanTotal = Object.values(status.scans).reduce((sum, n) => sum + n, 0);
  if (scanTotal === 0 && status.samples.length === 0) {
    return { headline: status.settled ? 'No files yet' : 'Looking at the files', work: '' };
  }
  const fitted = status.samples.filter((s) => s.state === 'fitted').length;
  const headline = [
    `${fitted} of ${formatCount(status.samples.length, 'sample')} fitted`,
    `${status.scans.reduced} of ${formatCount(scanTotal - status.scans.superseded, 'scan')} reduced`,
  ].join(', ');
  if (status.settled) return { headline, work: '' };
  const left = status.eta_s === null ? '' : `, about ${formatDuration(status.eta_s)} left`;
  const { running, queued } = status.jobs;
  return { headline, work: `${formatCount(running, 'job')} running, ${queued} queued${left}` };
}

/** Name of a mark for those who do not see it: instrument, rate, state, peak, in the order of interest. */
export function describeMark(mark: ScanMark, units: Units): string {
  const rate = mark.rateKPerS === null ? 'no rate known' : formatRate(mark.rateKPerS, units);
  const peaks = mark.rows
    .filter((row) => row.peak_K !== null)
    .map((row) => `peak ${formatTemperature(row.peak_K as number, units)}`);
  return [
    mark.instrument,
    mark.isCooling ? `${rate} cooling` : rate,
    SCAN_STATE_NAMES[mark.status],
    ...peaks,
    ...(mark.concern ? ['flagged'] : []),
  ].join(', ');
}

/** A parameter row as text: value, spread and method. */
export function describeEstimate(row: {
  value: number;
  lower95: number | null;
  upper95: number | null;
  method: string;
  variant: string;
}): { value: string; spread: string; method: string } {
  return { ...formatEstimate(row.value, row.lower95, row.upper95), method: methodName(row.method, row.variant) };
}
