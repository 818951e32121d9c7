import { sql } from 'drizzle-orm';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { type SampleState, SCAN_STATES, type ScanState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import type { Step } from './job-rows.ts';
import { type StepPace, secondsLeft } from './time-left.ts';

/** Finished jobs of a campaign from which its pace is told. */
const PACE_JOBS = 200;

/** Where the campaign stands (the body of GET /campaigns/:id/status). */
export async function campaignStatus(ports: Ports, campaignId: string): Promise<CampaignStatus> {
  const { read } = ports.database;
  const now = ports.clock.now();
  const counted = await read.all<{ status: ScanState; count: number }>(sql`
    select status, count(*) as count from scans where campaign_id = ${campaignId} group by status`);
  const samples = await read.all<{
    sample: string;
    state: SampleState;
    reason: string | null;
    verdict: string | null;
  }>(sql`
    select sample, state, reason, (
      select json_extract(body, '$.verdict') from verdicts v
      where v.campaign_id = ${campaignId} and v.sample = samples.sample order by v.position limit 1) as verdict
    from samples where campaign_id = ${campaignId} order by sample`);
  const [jobs] = await read.all<{ queued: number; running: number; failed: number; oldest: number | null }>(sql`
    select count(*) filter (where state = 'queued') as queued, count(*) filter (where state = 'running') as running,
      count(*) filter (where state = 'failed') as failed,
      min(case when state in ('queued', 'running') then created_at end) as oldest
    from jobs where campaign_id = ${campaignId} and state in ('queued', 'running', 'failed')`);
  const scans = Object.fromEntries(SCAN_STATES.map((state) => [state, 0])) as Record<ScanState, number>;
  for (const { status, count } of counted) scans[status] = count;
  const settled = jobs.queued + jobs.running === 0;
  return {
    settled,
    scans,
    samples: samples.map(({ sample, state, reason, verdict }) => ({
      sample,
      state,
      ...(reason !== null && { reason }),
      ...(verdict !== null && { verdict }),
    })),
    jobs: {
      queued: jobs.queued,
      running: jobs.running,
      failed: jobs.failed,
      oldest_age_s: jobs.oldest === null ? null : Math.max(0, (now - jobs.oldest) / 1000),
    },
    eta_s: settled
      ? 0
      : await estimateSeconds(
          ports,
          campaignId,
          scans,
          samples.map((sample) => sample.state),
        ),
  };
}

/**
 * Seconds until the campaign is settled: every step that is still to come, of scans and samples that no job is queued for yet too, at
 * the pace of the jobs that ended last. Null before any job has ended.
 */
async function estimateSeconds(
  ports: Ports,
  campaignId: string,
  scans: Record<ScanState, number>,
  samples: readonly SampleState[],
): Promise<number | null> {
  const { read } = ports.database;
  const paces = await read.all<StepPace>(sql`
    select step, avg(finished_at - started_at) as meanMs,
      max(1.0, sum(finished_at - started_at) * 1.0 / max(1, max(finished_at) - min(started_at))) as atOnce
    from (select step, started_at, finished_at from jobs where campaign_id = ${campaignId} and state = 'done' and started_at is not null
      order by finished_at desc limit ${PACE_JOBS}) group by step`);
  const open = await read.all<{ step: Step; count: number }>(sql`
    select step, count(*) as count from jobs
    where campaign_id = ${campaignId} and state in ('queued', 'running') group by step`);
  const toFit = samples.filter((state) => ['waiting', 'queued', 'fitting', 'stale'].includes(state)).length;
  const toCome: Partial<Record<Step, number>> = {
    'read-scan': scans.received,
    'reduce-scan': scans.read,
    'fit-sample': toFit,
    'judge-curvature': toFit,
    'forecast-sample': toFit,
    'plan-campaign': 1,
  };
  for (const { step, count } of open) toCome[step] = Math.max(count, toCome[step] ?? 0);
  const seconds = secondsLeft(toCome, paces);
  return seconds === null ? null : Math.round(seconds * 10) / 10;
}
