import { and, asc, eq, gt, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { campaigns, jobs } from '../../schema/tables/index.ts';
import type { JobState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import { LOCAL_LAB, type Page } from './campaigns.ts';
import { runBatch, type Statement } from './fence.ts';
import { queueDueJobs, touchCampaign } from './job-rows.ts';
import { wakeCampaign } from './leases.ts';
import { StoreRefusal } from './refusals.ts';

/** A job as the outside sees it; times are ms since the epoch. */
export interface JobView {
  id: string;
  campaign_id: string;
  step: string;
  subject: string;
  state: JobState;
  attempts: number;
  last_error: string | null;
  next_try_at: number;
  created_at: number;
  started_at: number | null;
  finished_at: number | null;
}

const VIEW = {
  id: jobs.id,
  campaign_id: jobs.campaignId,
  step: jobs.step,
  subject: jobs.subject,
  state: jobs.state,
  attempts: jobs.attempts,
  last_error: jobs.lastError,
  next_try_at: jobs.nextTryAt,
  created_at: jobs.createdAt,
  started_at: jobs.startedAt,
  finished_at: jobs.finishedAt,
};

/** Jobs of a lab, ordered by id. */
export function listJobs(
  ports: Ports,
  filter: Page & { lab?: string; campaignId?: string; state?: JobState } = {},
): Promise<JobView[]> {
  const { lab = LOCAL_LAB, campaignId, state, after, limit } = filter;
  const query = ports.database.read
    .select(VIEW)
    .from(jobs)
    .innerJoin(campaigns, eq(campaigns.id, jobs.campaignId))
    .where(
      and(
        eq(campaigns.lab, lab),
        campaignId === undefined ? undefined : eq(jobs.campaignId, campaignId),
        state === undefined ? undefined : eq(jobs.state, state),
        after === undefined ? undefined : gt(jobs.id, after),
      ),
    )
    .orderBy(asc(jobs.id))
    .$dynamic();
  return limit === undefined ? query.all() : query.limit(limit).all();
}

async function findJob(ports: Ports, jobId: string, lab: string): Promise<JobView> {
  const [job] = await ports.database.read
    .select(VIEW)
    .from(jobs)
    .innerJoin(campaigns, eq(campaigns.id, jobs.campaignId))
    .where(and(eq(jobs.id, jobId), eq(campaigns.lab, lab)));
  if (!job) throw new StoreRefusal('job-unknown', `there is no job ${jobId}`);
  return job;
}

/** Queues a failed job again with a fresh count of attempts. Throws StoreRefusal `job-unknown` or `job-not-failed`. */
export async function retryJob(ports: Ports, jobId: string, lab = LOCAL_LAB): Promise<JobView> {
  const job = await findJob(ports, jobId, lab);
  const now = ports.clock.now();
  const notFailed = (state: string) =>
    new StoreRefusal('job-not-failed', `job ${jobId} is ${state}; only a failed job can be tried again`);
  if (job.state !== 'failed') throw notFailed(job.state);
  await ports.database.write((db) =>
    runBatch(db, [
      // A newer job on the same subject waits already: that one does the work.
      db.run(sql`
        update jobs set attempts = 0, last_error = null, next_try_at = ${now}, finished_at = null, woken = 0,
          state = case when exists (select 1 from jobs twin where twin.step = jobs.step and twin.subject = jobs.subject and twin.state = 'queued')
            then 'done' else 'queued' end
        where id = ${jobId} and state = 'failed'`),
      ...reviveSubject(db, job),
      touchCampaign(job.campaign_id, true),
    ]),
  );
  await ports.queue.wake(jobId, 0);
  return findJob(ports, jobId, lab);
}

/** Takes back what the failed job did to its subject. */
function reviveSubject(db: LibSQLDatabase, { campaign_id: campaignId, step, subject }: JobView): Statement[] {
  switch (step) {
    case 'read-scan':
      return [
        db.run(sql`update files set state = 'unread', reason = null where id = ${subject} and state = 'failed'`),
        db.run(
          sql`update scans set status = 'received', reason = null where file_id = ${subject} and status = 'failed'`,
        ),
      ];
    case 'read-sheet':
    case 'unpack-archive':
      return [db.run(sql`update files set state = 'unread', reason = null where id = ${subject} and state = 'failed'`)];
    case 'reduce-scan':
      return [db.run(sql`update scans set status = 'read', reason = null where id = ${subject} and status = 'failed'`)];
    case 'calibrate-instrument':
      return [
        db.run(sql`
          update scans set status = 'read', reason = null where campaign_id = ${campaignId} and status = 'failed'
            and instrument = (select instrument from instruments where id = ${subject})
            and file_id in (select id from files where campaign_id = ${campaignId} and state = 'read')`),
      ];
    case 'fit-sample':
      return [
        db.run(sql`update samples set state = 'queued', reason = null where id = ${subject} and state = 'failed'`),
      ];
    default:
      return [];
  }
}

/** Marks every sample of the campaign for a new fit; where no input changed the fit is a look-up. Returns how many. */
export async function refitCampaign(ports: Ports, campaignId: string): Promise<number> {
  const now = ports.clock.now();
  const rows = await ports.database.write(async (db) => {
    const [marked] = (await runBatch(db, [
      db.run(
        sql`update samples set inputs_revision = inputs_revision + 1, state = 'stale' where campaign_id = ${campaignId}`,
      ),
      ...queueDueJobs(campaignId, now, { samples: true }),
    ])) as { rowsAffected: number }[];
    return marked.rowsAffected;
  });
  await wakeCampaign(ports, campaignId);
  return rows;
}
