import type { Context } from 'hono';
import { streamSSE } from 'hono/streaming';
import type { Clock } from '../jobs/ports/index.ts';
import type { CampaignStatus } from '../schema/wire/campaign.ts';

/** How often the state is looked at, and after how long the stream ends so that the client resumes. */
export interface StreamTimes {
  pollMs: number;
  lifeMs: number;
}

export interface StampedStatus {
  revision: number;
  status: CampaignStatus;
}

/** Names a state, also as the id of its event: it changes when anything in the body changes but the running ages. */
export const stateId = ({ revision, status: { jobs } }: StampedStatus): string =>
  [revision, jobs.queued, jobs.running, jobs.failed].join('.');

/**
 * Server-sent events `status` with the body of the status route: at once unless `Last-Event-ID` names the state as it
 * stands, then at every change. `load` gives undefined once the campaign is gone, which ends the stream.
 */
export function streamStatus(
  c: Context,
  load: () => Promise<StampedStatus | undefined>,
  clock: Clock,
  times: StreamTimes,
): Response {
  let last = c.req.header('last-event-id');
  return streamSSE(c, async (stream) => {
    const end = clock.now() + times.lifeMs;
    while (!stream.aborted && clock.now() < end) {
      const stamped = await load();
      if (!stamped) return;
      const id = stateId(stamped);
      if (id !== last) await stream.writeSSE({ event: 'status', id, data: JSON.stringify(stamped.status) });
      last = id;
      await stream.sleep(times.pollMs);
    }
  });
}
