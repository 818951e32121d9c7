import type { JobEvent, Observer, Ports } from '../ports/index.ts';
import { type ColumnsCache, failStep, runStep } from '../steps/index.ts';
import { LateWorker } from '../store/fence.ts';
import { type ClaimedJob, postponeJob } from '../store/leases.ts';
import { ReducedLost, reduceAgain } from '../store/lost-blobs.ts';
import { isStoreTrouble } from '../store/trouble.ts';

/** What became of one attempt. */
export type JobEnd = JobEvent['end'];

/**
 * Runs a claimed job to its write-back. A step that throws is noted on the job; where a store is full, locked or out of reach
 * the job waits without an attempt counted. A lease that went to another worker is `late` and leaves no trace.
 * Throws only when not even the failure could be noted: the lease then lapses and the sweep takes over.
 */
export async function runJob(ports: Ports, job: ClaimedJob, cache: ColumnsCache, observer?: Observer): Promise<JobEnd> {
  const started = ports.clock.now();
  const tell = (end: JobEnd, error?: unknown): JobEnd => {
    observer?.job({
      jobId: job.id,
      campaignId: job.campaignId,
      step: job.step,
      attempt: job.attempts,
      end,
      durationMs: ports.clock.now() - started,
      ...(error !== undefined && { error: error instanceof Error ? error.message : String(error) }),
    });
    return end;
  };
  try {
    await runStep(ports, job, cache);
    return tell('done');
  } catch (error) {
    if (error instanceof LateWorker) return tell('late');
    try {
      if (isStoreTrouble(error)) {
        await postponeJob(ports, job, error instanceof Error ? error.message : String(error));
        return tell('postponed', error);
      }
      if (error instanceof ReducedLost) await reduceAgain(ports, job.campaignId, error.key);
      await failStep(ports, job, error);
      return tell('failed', error);
    } catch (second) {
      if (second instanceof LateWorker) return tell('late');
      observer?.trouble('the failure of a job could not be noted', second, { job_id: job.id });
      throw second;
    }
  }
}
