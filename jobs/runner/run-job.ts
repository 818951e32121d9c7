import type { Ports } from '../ports/index.ts';
import { type ColumnsCache, DerivedLost, failStep, runStep } from '../steps/index.ts';
import { LateWorker } from '../store/fence.ts';
import type { ClaimedJob } from '../store/leases.ts';
import { reduceAgain } from '../store/lost-blobs.ts';

/** What became of one attempt. */
export type JobEnd = 'done' | 'failed' | 'late';

/**
 * Runs a claimed job to its write-back. A step that throws is noted on the job; a lease that went to another worker is `late`
 * and leaves no trace. Throws only when not even the failure could be noted: the lease then lapses and the sweep takes over.
 */
export async function runJob(ports: Ports, job: ClaimedJob, cache: ColumnsCache): Promise<JobEnd> {
  try {
    await runStep(ports, job, cache);
    return 'done';
  } catch (error) {
    if (error instanceof LateWorker) return 'late';
    try {
      if (error instanceof DerivedLost) await reduceAgain(ports, job.campaignId, error.key);
      await failStep(ports, job, error);
      return 'failed';
    } catch (second) {
      if (second instanceof LateWorker) return 'late';
      throw second;
    }
  }
}
