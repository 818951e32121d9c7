import type { Ports } from '../ports/index.ts';
import type { Statement } from '../store/fence.ts';
import { saveFailedSample } from '../store/fit-rows.ts';
import { saveFailedInstrument } from '../store/instrument-rows.ts';
import type { Step } from '../store/job-rows.ts';
import { type ClaimedJob, failAttempt } from '../store/leases.ts';
import { saveFailedFile, saveFailedScan } from '../store/scan-rows.ts';
import { assignCampaign } from './assign-campaign.ts';
import { calibrateInstrument } from './calibrate-instrument.ts';
import type { ColumnsCache } from './columns.ts';
import { fitStoredSample } from './fit-sample.ts';
import { forecastStoredSample } from './forecast-sample.ts';
import { judgeStoredSample } from './judge-curvature.ts';
import { planStoredCampaign } from './plan-campaign.ts';
import { readScanFile } from './read-scan.ts';
import { readSheetFile } from './read-sheet.ts';
import { reduceStoredScan } from './reduce-scan.ts';
import { unpackArchiveFile } from './unpack-archive.ts';

export { ColumnsCache } from './columns.ts';

const STEPS: Record<Step, (ports: Ports, job: ClaimedJob, cache: ColumnsCache) => Promise<void>> = {
  'read-sheet': readSheetFile,
  'unpack-archive': unpackArchiveFile,
  'assign-scans': assignCampaign,
  'calibrate-instrument': calibrateInstrument,
  'reduce-scan': reduceStoredScan,
  'fit-sample': fitStoredSample,
  'judge-curvature': judgeStoredSample,
  'forecast-sample': forecastStoredSample,
  'read-scan': readScanFile,
  'plan-campaign': planStoredCampaign,
};

/** Runs one claimed job: load, one pure call, one write-back. Throws LateWorker when the lease went to another, else what the step threw. */
export function runStep(ports: Ports, job: ClaimedJob, cache: ColumnsCache): Promise<void> {
  return STEPS[job.step](ports, job, cache);
}

/** Notes that a step threw; after the last attempt its subject fails with the same words and the rest of the campaign goes on. */
export function failStep(ports: Ports, job: ClaimedJob, error: unknown): Promise<void> {
  const reason = error instanceof Error ? error.message : String(error);
  return failAttempt(ports, job, reason, (db): Statement[] => {
    const said = `step ${job.step} gave up after ${job.attempts} attempts: ${reason}`;
    switch (job.step) {
      case 'read-scan':
      case 'read-sheet':
      case 'unpack-archive':
        return saveFailedFile(db, job.campaignId, job.subject, said);
      case 'calibrate-instrument':
        return saveFailedInstrument(db, job.campaignId, job.subject, said);
      case 'reduce-scan':
        return saveFailedScan(db, job.campaignId, job.subject, said);
      case 'fit-sample':
        return saveFailedSample(db, job.subject, said);
      case 'assign-scans':
      case 'judge-curvature':
      case 'forecast-sample':
      case 'plan-campaign':
        return [];
    }
  });
}
