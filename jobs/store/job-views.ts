import type { JobState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import type { Page } from './campaigns.ts';

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

/** Jobs of a lab, ordered by id. */
export async function listJobs(
  _ports: Ports,
  _filter: Page & { lab?: string; campaignId?: string; state?: JobState } = {},
): Promise<JobView[]> {
  throw new Error('not written yet');
}

/** Queues a failed job again with a fresh count of attempts. Throws StoreRefusal `job-unknown` or `job-not-failed`. */
export async function retryJob(_ports: Ports, _jobId: string, _lab?: string): Promise<JobView> {
  throw new Error('not written yet');
}

/** Marks every sample of the campaign for a new fit; where no input changed the fit is a look-up. Returns how many. */
export async function refitCampaign(_ports: Ports, _campaignId: string): Promise<number> {
  throw new Error('not written yet');
}
