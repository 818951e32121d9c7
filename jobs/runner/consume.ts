import type { Observer, Ports } from '../ports/index.ts';
import { ColumnsCache, failStep } from '../steps/index.ts';
import { claimJobs, findLostJobs, listDueJobIds } from '../store/leases.ts';
import { runJob } from './run-job.ts';

/** Wake-ups that one sweep sends. */
const SWEEP_LIMIT = 100;

/** Runs the job that a wake-up names, if it is due and nobody holds it: a doubled or late message does nothing. */
export async function consumeWake(ports: Ports, jobId: string, owner: string, observer?: Observer): Promise<void> {
  const [job] = await claimJobs(ports, { owner, limit: 1, jobId });
  if (job) await runJob(ports, job, new ColumnsCache(), observer);
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
