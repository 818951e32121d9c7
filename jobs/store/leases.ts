import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import type { Ports } from '../ports/index.ts';
import { guarded, isFenceBreak, LateWorker, runBatch, type Statement } from './fence.ts';
import { hashOf } from './ids.ts';
import { type DueCheck, queueDueJobs, type Step, touchCampaign } from './job-rows.ts';
import { allRows, text } from './statement.ts';

/** A worker that says nothing for this long has lost its job. */
export const LEASE_MS = 30_000;
export const MAX_ATTEMPTS = 5;
const BACK_OFF_MS = 1_000;
const LONGEST_BACK_OFF_MS = 60_000;

/** A job that this process holds. */
export interface ClaimedJob {
  id: string;
  campaignId: string;
  step: Step;
  subject: string;
  attempts: number;
  generation: number;
}

export interface ClaimOptions {
  owner: string;
  limit: number;
  campaignId?: string;
  /** Only this job; also where `owner` holds it already: it is the same message again, whose first delivery crashed. */
  jobId?: string;
  /** Take assignments that still wait for more uploads: this worker has nothing else to do. */
  eager?: boolean;
}

/**
 * Takes up to `limit` due jobs with one statement: waiting ones whose time has come, and running ones whose lease lapsed.
 * The generation grows with each claim. Two jobs on the same subject never run at once: results would be written over each other.
 */
export async function claimJobs(ports: Ports, options: ClaimOptions): Promise<ClaimedJob[]> {
  const { owner, limit, campaignId, jobId, eager = false } = options;
  const now = ports.clock.now();
  const due = eager
    ? text`(next_try_at <= ${now} or (step = 'assign-scans' and attempts = 0))`
    : text`next_try_at <= ${now}`;
  // Sheets first: an assignment by folder names would be made anew by the sheet. A message asks for one job and gets it.
  const ripe =
    jobId === undefined
      ? text`(step <> 'assign-scans' or not exists (
          select 1 from jobs sheet where sheet.campaign_id = jobs.campaign_id and sheet.state in ('queued', 'running')
            and sheet.step in ('read-sheet', 'unpack-archive')))`
      : text`1`;
  const within = text`${campaignId === undefined ? text`1` : text`campaign_id = ${campaignId}`} and ${jobId === undefined ? text`1` : text`id = ${jobId}`}`;
  const lapsed =
    jobId === undefined ? text`leased_until < ${now}` : text`(leased_until < ${now} or leased_by = ${owner})`;
  const rows = await ports.database.write((db) =>
    allRows<ClaimedJob>(
      db,
      text`
      update jobs set state = 'running', generation = generation + 1, attempts = attempts + 1, started_at = ${now},
        leased_by = ${owner}, leased_until = ${now + LEASE_MS}
      where id in (
        select id from (
          select * from (
            select id, priority, rowid as row from jobs where state = 'queued' and ${due} and ${within} and ${ripe}
              and not exists (select 1 from jobs twin where twin.step = jobs.step and twin.subject = jobs.subject and twin.state = 'running')
            order by priority, rowid limit ${limit})
          union all
          select id, priority, rowid as row from jobs
          where state = 'running' and ${lapsed} and attempts < ${MAX_ATTEMPTS} and ${within}
        ) order by priority, row limit ${limit})
      returning id, campaign_id as campaignId, step, subject, attempts, generation`,
    ),
  );
  const fitted = rows.filter((row) => row.step === 'fit-sample').map((row) => row.subject);
  if (fitted.length > 0) {
    await ports.database.write((db) =>
      runBatch(db, [
        text`update samples set state = 'fitting' where state = 'queued' and id in (select value from json_each(${JSON.stringify(fitted)}))`,
      ]),
    );
  }
  return rows;
}

/** Extends the leases of jobs in flight. Returns the ids still held; the others went to another worker. */
export async function extendLeases(ports: Ports, held: readonly ClaimedJob[]): Promise<Set<string>> {
  if (held.length === 0) return new Set();
  const until = ports.clock.now() + LEASE_MS;
  const pairs = JSON.stringify(held.map(({ id, generation }) => [id, generation]));
  const rows = await ports.database.write((db) =>
    allRows<{ id: string }>(
      db,
      text`
      update jobs set leased_until = ${until} where state = 'running' and (id, generation) in (select value ->> 0, value ->> 1 from json_each(${pairs})) returning id`,
    ),
  );
  return new Set(rows.map((row) => row.id));
}

const guardOf = (job: ClaimedJob, now: number): Statement =>
  text`
    update jobs set state = 'done', finished_at = ${now}, leased_by = null, leased_until = null, last_error = null
    where id = ${job.id} and generation = ${job.generation} and state = 'running'`;

async function writeBack(ports: Ports, job: ClaimedJob, build: (db: LibSQLDatabase) => Statement[]): Promise<void> {
  try {
    await ports.database.write((db) => runBatch(db, build(db)));
  } catch (error) {
    if (isFenceBreak(error)) throw new LateWorker({ jobId: job.id, generation: job.generation });
    throw error;
  }
  await wakeNewJobs(ports, job);
}

/**
 * The one write-back of a job: results, job done, next jobs, in one batch that fails whole when the lease is gone.
 * Throws LateWorker then.
 */
export function completeJob(
  ports: Ports,
  job: ClaimedJob,
  results: (db: LibSQLDatabase, now: number) => Statement[] = () => [],
  check: DueCheck = {},
): Promise<void> {
  const now = ports.clock.now();
  return writeBack(ports, job, (db) => guarded(guardOf(job, now), [...results(db, now), ...followUp(job, now, check)]));
}

/** A plan changes what the campaign shows and nothing that another plan would be made from. */
const followUp = (job: ClaimedJob, now: number, check: DueCheck): Statement[] =>
  job.step === 'plan-campaign' ? [touchCampaign(job.campaignId, false)] : queueDueJobs(job.campaignId, now, check);

/** Wait before the next attempt, ms: doubling, ± 50 %, spread by the job's own id so that a burst of failures does not return as a burst. */
export function backOffMs(jobId: string, attempts: number): number {
  const spread = 0.5 + Number.parseInt(hashOf([jobId, attempts]).slice(0, 8), 16) / 0xffffffff;
  return Math.round(Math.min(LONGEST_BACK_OFF_MS, BACK_OFF_MS * 2 ** (attempts - 1)) * spread);
}

/**
 * Notes a failed attempt: the job waits and is tried again, or after the last attempt fails for good together with its
 * subject (`subjectFailed` gives the statements). Throws LateWorker when the lease is gone.
 */
export async function failAttempt(
  ports: Ports,
  job: ClaimedJob,
  error: string,
  subjectFailed: (db: LibSQLDatabase, now: number) => Statement[],
): Promise<void> {
  const now = ports.clock.now();
  if (job.attempts >= MAX_ATTEMPTS) {
    await writeBack(ports, job, (db) =>
      guarded(
        text`
          update jobs set state = 'failed', finished_at = ${now}, leased_by = null, leased_until = null, last_error = ${error}
          where id = ${job.id} and generation = ${job.generation} and state = 'running'`,
        [...subjectFailed(db, now), ...followUp(job, now, { instruments: true, samples: true })],
      ),
    );
    return;
  }
  const delayMs = backOffMs(job.id, job.attempts);
  // A newer job on the same subject waits already: it does the work, and only one may wait.
  await writeBack(ports, job, () =>
    guarded(
      text`
        update jobs set leased_by = null, leased_until = null, last_error = ${error}, next_try_at = ${now + delayMs}, woken = 0,
          state = case when exists (select 1 from jobs twin where twin.step = jobs.step and twin.subject = jobs.subject and twin.state = 'queued')
            then 'done' else 'queued' end
        where id = ${job.id} and generation = ${job.generation} and state = 'running'`,
      [touchCampaign(job.campaignId, false)],
    ),
  );
}

/** Wait of a job whose stores were in trouble, ms, spread by its id. */
const STORE_TROUBLE_MS = 10_000;

/** Puts a job back whose stores were full, locked or out of reach: it waits, says why, and no attempt counts. Throws LateWorker when the lease is gone. */
export async function postponeJob(ports: Ports, job: ClaimedJob, error: string): Promise<void> {
  const delayMs = backOffMs(job.id, 1) + STORE_TROUBLE_MS;
  await writeBack(ports, job, () =>
    guarded(putBack(job, ports.clock.now() + delayMs, `waits for the stores: ${error}`), [
      touchCampaign(job.campaignId, false),
    ]),
  );
}

/** Puts back what this process cannot finish, for others to take at once; a late write-back of its own is refused by the generation. */
export async function handBack(ports: Ports, held: readonly ClaimedJob[]): Promise<void> {
  for (const job of held) {
    const back = guarded(putBack(job, ports.clock.now(), 'its worker was stopped'), []);
    await ports.database
      .write((db) => runBatch(db, back))
      .catch((error) => {
        if (!isFenceBreak(error)) throw error;
      });
    await ports.queue.wake(job.id, 0);
  }
}

const putBack = (job: ClaimedJob, nextTryAt: number, said: string): Statement => text`
  update jobs set leased_by = null, leased_until = null, last_error = ${said}, next_try_at = ${nextTryAt}, woken = 0,
    attempts = attempts - 1, generation = generation + 1,
    state = case when exists (select 1 from jobs twin where twin.step = jobs.step and twin.subject = jobs.subject and twin.state = 'queued')
      then 'done' else 'queued' end
  where id = ${job.id} and generation = ${job.generation} and state = 'running'`;

/** Jobs whose worker vanished on their last attempt: nobody may claim them, so the sweep fails them. */
export function findLostJobs(ports: Ports): Promise<ClaimedJob[]> {
  return allRows<ClaimedJob>(
    ports.database.read,
    text`
    select id, campaign_id as campaignId, step, subject, attempts, generation from jobs
    where state = 'running' and leased_until < ${ports.clock.now()} and attempts >= ${MAX_ATTEMPTS}`,
  );
}

/** A job that is running by the record, whoever holds it. */
export async function findRunningJob(ports: Ports, jobId: string): Promise<ClaimedJob | undefined> {
  const rows = await allRows<ClaimedJob>(
    ports.database.read,
    text`select id, campaign_id as campaignId, step, subject, attempts, generation from jobs where id = ${jobId} and state = 'running'`,
  );
  return rows[0];
}

/** Sends wake-ups for jobs that were queued inside a write-back. */
const wakeNewJobs = (ports: Ports, job: ClaimedJob): Promise<void> => wakeCampaign(ports, job.campaignId, job);

/** Sends wake-ups for the jobs of a campaign that none was sent for; after `done`, also for a twin that waited for it and may have been woken in vain. */
export async function wakeCampaign(
  ports: Ports,
  campaignId: string,
  done: { step: string; subject: string } = { step: '', subject: '' },
): Promise<void> {
  // Where wake-ups are heard in this process one is enough, and the rows are looked at anyway.
  if (ports.queue.heard) return ports.queue.wake(campaignId, 0);
  const { step, subject } = done;
  const rows = await ports.database.write((db) =>
    allRows<{ id: string; nextTryAt: number }>(
      db,
      text`
      update jobs set woken = 1 where campaign_id = ${campaignId} and state = 'queued' and (woken = 0 or (step = ${step} and subject = ${subject}))
      returning id, next_try_at as nextTryAt`,
    ),
  );
  const now = ports.clock.now();
  for (const { id, nextTryAt } of rows) await ports.queue.wake(id, Math.max(0, (nextTryAt - now) / 1000));
}

/** Ids of due jobs, for the sweep of the serverless home: a lost wake-up is sent again. */
export async function listDueJobIds(ports: Ports, limit: number): Promise<string[]> {
  const now = ports.clock.now();
  const rows = await allRows<{ id: string }>(
    ports.database.read,
    text`
    select id from jobs where (state = 'queued' and next_try_at <= ${now}) or (state = 'running' and leased_until < ${now})
    order by priority, rowid limit ${limit}`,
  );
  return rows.map((row) => row.id);
}

/** How many jobs are open, and when the next waiting one is due (ms since the epoch). */
export async function openJobs(ports: Ports, campaignId?: string): Promise<{ open: number; nextTryAt: number | null }> {
  const within = campaignId === undefined ? text`1` : text`campaign_id = ${campaignId}`;
  const [row] = await allRows<{ open: number; nextTryAt: number | null }>(
    ports.database.read,
    text`
    select count(*) as open, min(case when state = 'queued' then next_try_at else leased_until end) as nextTryAt
    from jobs where state in ('queued', 'running') and ${within}`,
  );
  return row;
}
