import type { CoverageScan } from '../../schema/wire/campaign.ts';
import type { PeakSheetRow } from '../../schema/wire/forecasts.ts';
import { planCampaign } from '../campaign/index.ts';
import type { Ports } from '../ports/index.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { loadPlan, type PlanRows, savePlan } from '../store/plan-rows.ts';

/** Step `plan-campaign`: coverage and gaps from the reduced scans. */
export async function planStoredCampaign(ports: Ports, job: ClaimedJob): Promise<void> {
  const { samples, scans, peaks, calibrations } = await loadPlan(ports, job.campaignId);
  const used = new Set([...scans, ...peaks].map((scan) => scan.instrument));
  const plan = planCampaign({
    samples,
    scans: [
      ...scans.filter((scan) => scan.role === 'sample').flatMap(coverageScanOf),
      ...peaks.flatMap(coveragePeakOf),
    ],
    instruments: calibrations
      .filter((row) => used.has(row.instrument))
      .map(({ instrument, kind, standards }) => ({ instrument, kind, standards })),
  });
  await completeJob(ports, job, (db) => [savePlan(db, job.campaignId, plan)]);
}

/** A heating scan at its measured rate. Coolings and holds fill no decade of heating rate. */
function coverageScanOf({ sample, instrument, sheetRow, result }: PlanRows['scans'][number]): CoverageScan[] {
  const analysed = result?.segments.find((segment) => segment.segment === result.segment);
  const rateKPerS = result?.events[0]?.rateKPerS ?? analysed?.rateKPerS;
  if (rateKPerS === undefined || rateKPerS <= 0 || analysed?.kind === 'hold') return [];
  return [
    { sample, instrument, rateKPerS, ...(sheetRow?.replicate !== undefined && { replicate: sheetRow.replicate }) },
  ];
}

/** A row of peaks.csv fills its decade as a scan does, unless it tells of no event. */
const coveragePeakOf = ({ sample, instrument, rateKPerS, peakK, replicate }: PeakSheetRow): CoverageScan[] =>
  peakK === undefined || rateKPerS <= 0
    ? []
    : [{ sample, instrument, rateKPerS, ...(replicate !== undefined && { replicate }) }];
