import type { Observer, Ports } from '../ports/index.ts';
import { ColumnsCache } from '../steps/index.ts';
import { type ClaimedJob, claimJobs, extendLeases, handBack, LEASE_MS, openJobs } from '../store/leases.ts';
import { sweepLostJobs } from './consume.ts';
import { runJob } from './run-job.ts';

export { consumeWake, endGivenUpJob, sweepWakes } from './consume.ts';
export { keepHouse, keepHouseHourly } from './housekeeping.ts';

/** How often a process looks for jobs that another one queued. */
const POLL_MS = 500;
const SWEEP_EVERY_MS = LEASE_MS / 2;
const HEARTBEAT_MS = LEASE_MS / 3;
/** Longest rest after claims that failed in a row: stores that are out of reach are asked ever less often. */
const LONGEST_REST_MS = 10_000;
/** How long a stop waits for jobs in flight before they are handed back. */
const GRACE_MS = 10_000;

export interface RunnerOptions {
  /** Jobs in flight at once; workers + 1 keeps worker threads busy. */
  concurrency: number;
  /** Names this process in leases. */
  owner: string;
  observer?: Observer;
}

export interface Runner {
  /** Runs until nothing is queued or running (in the campaign, or at all). Throws when the database cannot be reached. */
  drain(campaignId?: string): Promise<void>;
  /** Takes jobs until stopped. */
  start(): void;
  /** Takes no more jobs, waits for those in flight, and hands back what is not finished in time. Ends a drain too. */
  stop(graceMs?: number): Promise<void>;
}

/** Takes due jobs and keeps up to `concurrency` of them in flight, with their leases extended while they run. */
export function createRunner(ports: Ports, { concurrency, owner, observer }: RunnerOptions): Runner {
  const cache = new ColumnsCache();
  const inFlight = new Map<string, { job: ClaimedJob; end: Promise<void> }>();
  const stopping = new AbortController();
  /** Rests that a job's end, or the end of the runner, cuts short. Raced promises would keep every rest in memory. */
  const rests = new Set<AbortController>();
  /** A job ended since the free places were counted. */
  let stirred = false;
  const stir = () => {
    stirred = true;
    for (const over of rests) over.abort();
  };
  stopping.signal.addEventListener('abort', stir);
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
    const end = runJob(ports, job, cache, observer)
      // Not even the failure could be noted: the lease lapses and the job is taken again.
      .catch(() => undefined)
      .then(() => {
        inFlight.delete(job.id);
        if (inFlight.size === 0) emptied.abort();
        stir();
      });
    if (inFlight.size === 0) {
      emptied = new AbortController();
      void keepLeases(emptied.signal);
    }
    inFlight.set(job.id, { job, end });
  }

  /** Fills the free places. Returns whether anything was taken. */
  async function fill(campaignId?: string): Promise<boolean> {
    stirred = false;
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
    if (stopping.signal.aborted || stirred) return;
    const over = new AbortController();
    rests.add(over);
    await (ports.queue.heard?.(ms, over.signal) ?? ports.clock.sleep(ms, over.signal));
    rests.delete(over);
  }

  async function loop(): Promise<void> {
    for (let failures = 0; !stopping.signal.aborted; ) {
      const before = failures;
      const took = await fill().catch((error) => {
        failures++;
        // Told at the 1st, 2nd, 4th, 8th … in a row: a store that is gone for days must not fill the disk with its log.
        if ((failures & (failures - 1)) === 0)
          observer?.trouble(`no job could be claimed, ${failures} times in a row`, error);
        return false;
      });
      if (failures === before) failures = 0;
      if (took && inFlight.size < concurrency) continue;
      await rest(Math.min(LONGEST_REST_MS, POLL_MS * 2 ** failures));
    }
  }

  const finished = () => Promise.all([...inFlight.values()].map(({ end }) => end));

  /** Waits for what is in flight, at most `graceMs`; gives the rest to others. */
  async function finishOrHandBack(graceMs: number): Promise<void> {
    const over = new AbortController();
    const late = await Promise.race([
      finished().then(() => false),
      ports.clock.sleep(graceMs, over.signal).then(() => true),
    ]);
    over.abort();
    if (late)
      await handBack(
        ports,
        [...inFlight.values()].map(({ job }) => job),
      );
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
      if (!stopping.signal.aborted) await finished();
    },
    start() {
      background ??= loop();
    },
    async stop(graceMs = GRACE_MS) {
      stopping.abort();
      await background;
      await finishOrHandBack(graceMs);
    },
  };
}
