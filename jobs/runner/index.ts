import type { Ports } from '../ports/index.ts';
import { ColumnsCache } from '../steps/index.ts';
import { type ClaimedJob, claimJobs, extendLeases, LEASE_MS, openJobs } from '../store/leases.ts';
import { sweepLostJobs } from './consume.ts';
import { runJob } from './run-job.ts';

export { consumeWake, sweepWakes } from './consume.ts';

/** How often a process looks for jobs that another one queued. */
const POLL_MS = 500;
const SWEEP_EVERY_MS = LEASE_MS / 2;
const HEARTBEAT_MS = LEASE_MS / 3;

export interface RunnerOptions {
  /** Jobs in flight at once; workers + 1 keeps worker threads busy. */
  concurrency: number;
  /** Names this process in leases. */
  owner: string;
}

export interface Runner {
  /** Runs until nothing is queued or running (in the campaign, or at all). Throws when the database cannot be reached. */
  drain(campaignId?: string): Promise<void>;
  /** Takes jobs until stopped. */
  start(): void;
  /** Takes no more jobs, waits for those in flight. */
  stop(): Promise<void>;
}

/** Takes due jobs and keeps up to `concurrency` of them in flight, with their leases extended while they run. */
export function createRunner(ports: Ports, { concurrency, owner }: RunnerOptions): Runner {
  const cache = new ColumnsCache();
  const inFlight = new Map<string, { job: ClaimedJob; end: Promise<void> }>();
  const stopping = new AbortController();
  const stopped = new Promise<void>((resolve) => stopping.signal.addEventListener('abort', () => resolve()));
  let emptied = new AbortController();
  let sweptAt = Number.NEGATIVE_INFINITY;
  let background: Promise<void> | undefined;

  /** Extends leases while anything is in flight. A lease lost meanwhile shows at the write-back, which then fails whole. */
  async function keepLeases(signal: AbortSignal): Promise<void> {
    while (!signal.aborted) {
      await ports.clock.sleep(HEARTBEAT_MS, signal);
      if (signal.aborted) return;
      const held = [...inFlight.values()].map(({ job }) => job);
      await extendLeases(ports, held).catch(() => undefined);
    }
  }

  function launch(job: ClaimedJob): void {
    const end = runJob(ports, job, cache)
      // Not even the failure could be noted: the lease lapses and the job is taken again.
      .catch(() => undefined)
      .then(() => {
        inFlight.delete(job.id);
        if (inFlight.size === 0) emptied.abort();
      });
    if (inFlight.size === 0) {
      emptied = new AbortController();
      void keepLeases(emptied.signal);
    }
    inFlight.set(job.id, { job, end });
  }

  /** Fills the free places. Returns whether anything was taken. */
  async function fill(campaignId?: string): Promise<boolean> {
    const now = ports.clock.now();
    if (now - sweptAt >= SWEEP_EVERY_MS) {
      sweptAt = now;
      await sweepLostJobs(ports);
    }
    const limit = concurrency - inFlight.size;
    if (limit <= 0) return false;
    const taken = await claimJobs(ports, { owner, limit, campaignId, eager: inFlight.size === 0 });
    for (const job of taken) launch(job);
    return taken.length > 0;
  }

  /** Until a job ends, a wake-up is heard, the runner is stopped, or the time is over. */
  async function rest(ms: number): Promise<void> {
    const over = new AbortController();
    const heard = ports.queue.heard?.(ms, over.signal) ?? ports.clock.sleep(ms, over.signal);
    await Promise.race([heard, stopped, ...[...inFlight.values()].map(({ end }) => end)]);
    over.abort();
  }

  async function loop(): Promise<void> {
    while (!stopping.signal.aborted) {
      const took = await fill().catch(() => false);
      if (took && inFlight.size < concurrency) continue;
      await rest(POLL_MS);
    }
    await Promise.all([...inFlight.values()].map(({ end }) => end));
  }

  return {
    async drain(campaignId) {
      while (!stopping.signal.aborted) {
        if (await fill(campaignId)) continue;
        if (inFlight.size > 0) {
          await rest(POLL_MS);
          continue;
        }
        const { open, nextTryAt } = await openJobs(ports, campaignId);
        if (open === 0) return;
        // Held by another process, or waiting for its next attempt.
        await ports.clock.sleep(Math.min(POLL_MS, Math.max(1, (nextTryAt ?? 0) - ports.clock.now())));
      }
      await Promise.all([...inFlight.values()].map(({ end }) => end));
    },
    start() {
      background ??= loop();
    },
    async stop() {
      stopping.abort();
      await background;
    },
  };
}
