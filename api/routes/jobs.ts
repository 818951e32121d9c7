import { createRoute } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { type JobView, listJobs, retryJob } from '../../jobs/store/index.ts';
import { JOB_STATES } from '../../schema/wire/states.ts';
import { answerCsv, columnsOf, everyItem, formatQuery, orCsv } from '../csv-lists.ts';
import { type ApiApp, answersOf, BY_ID, listOf, oneOf, PAGE_QUERY, strict, textOf } from '../openapi.ts';
import { pageOf, requireCampaign } from '../results.ts';
import { JobShape } from '../shapes/campaign.ts';

const listRoute = createRoute({
  method: 'get',
  path: '/v1/jobs',
  summary: 'Jobs, ordered by id.',
  request: {
    query: strict({
      state: oneOf(JOB_STATES).optional(),
      campaign: textOf(80).optional().openapi({ description: 'Id or name of a campaign.' }),
      ...PAGE_QUERY,
      ...formatQuery('every such job, whatever limit and after say'),
    }),
  },
  responses: orCsv(answersOf(200, listOf(JobShape), 'A page of jobs.')),
});

const retryRoute = createRoute({
  method: 'post',
  path: '/v1/jobs/{id}/retry',
  summary: 'Queue a failed job again with fresh attempts.',
  request: BY_ID,
  responses: answersOf(202, JobShape, 'The job, queued.'),
});

const timeOf = (ms: number | null) => (ms === null ? null : new Date(ms).toISOString());

const shapeOf = ({ next_try_at, created_at, started_at, finished_at, ...job }: JobView) => ({
  ...job,
  next_try_at: new Date(next_try_at).toISOString(),
  created_at: new Date(created_at).toISOString(),
  started_at: timeOf(started_at),
  finished_at: timeOf(finished_at),
});

export function addJobRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(listRoute, async (c) => {
    const { state, campaign, limit, after, format } = c.req.valid('query');
    const { lab } = c.get('access');
    const campaignId = campaign === undefined ? undefined : (await requireCampaign(c, ports, campaign)).id;
    const load = (page: { limit: number; after?: string }) => listJobs(ports, { lab, state, campaignId, ...page });
    if (format === 'csv') return answerCsv(c, 'jobs', columnsOf(JobShape), everyItem(load, shapeOf));
    return c.json(pageOf(await load({ after, limit: limit + 1 }), limit, shapeOf), 200);
  });
  app.openapi(retryRoute, async (c) =>
    c.json(shapeOf(await retryJob(ports, c.req.valid('param').id, c.get('access').lab)), 202),
  );
}
