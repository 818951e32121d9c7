import type { Observer, Ports } from '../ports/index.ts';
import { ColumnsCache, failStep } from '../steps/index.ts';
import { LateWorker } from '../store/fence.ts';
import { claimJobs, findLostJobs, findRunningJob, listDueJobIds, MAX_ATTEMPTS } from '../store/leases.ts';
import { runJob } from './run-job.ts';

/** Wake-ups that one sweep sends. */
const SWEEP_LIMIT = 100;

/** Runs the job that a wake-up names, if it is due and nobody holds it: a doubled or late message does nothing. */
export async function consumeWake(ports: Ports, jobId: string, owner: string, observer?: Observer): Promise<void> {
  const [job] = await claimJobs(ports, { owner, limit: 1, jobId });
  if (job) await runJob(ports, job, new ColumnsCache(), observer);
}

/**
 * A message that the platform gave up on: each delivery of it ended its isolate before the row could be written, and would
 * again. The job fails with the reason; where it is not running any more the row has been written after all.
 */
export async function endGivenUpJob(ports: Ports, jobId: string): Promise<void> {
  const job = await findRunningJob(ports, jobId);
  if (!job) return;
  const reason = new Error(
    `the platform gave it up after ${job.attempts} attempts that ended without a word: out of memory or of CPU time, most likely`,
  );
  await failStep(ports, { ...job, attempts: MAX_ATTEMPTS }, reason).catch((error) => {
    if (!(error instanceof LateWorker)) throw error;
  });
}

/** Ends jobs whose worker vanished on the last attempt. */
export async function sweepLostJobs(ports: Ports): Promise<void> {
  for (const job of await findLostJobs(ports)) {
    await failStep(ports, job, new Error('its worker vanished without a word')).catch(() => undefined);
  }
}

/** Sends the wake-ups of due jobs again, for those that were lost. */
export async function sweepWakes(ports: Ports): Promise<void> {
  await sweepLostJobs(ports);
  for (const jobId of await listDueJobIds(ports, SWEEP_LIMIT)) await ports.queue.wake(jobId, 0);
}
