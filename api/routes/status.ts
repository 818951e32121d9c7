import { createRoute, z } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { campaignStatus, findCampaign, listSamples } from '../../jobs/store/index.ts';
import { answerCsv, byIdOrCsv, columnsOf, orCsv } from '../csv-lists.ts';
import { type StreamTimes, streamStatus } from '../event-stream.ts';
import { type ApiApp, answersOf, bodyOf, ID_PARAM, NO_QUERY, PROBLEM_ANSWER } from '../openapi.ts';
import { requireCampaign } from '../results.ts';
import { StatusShape } from '../shapes/campaign.ts';

const statusRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns/{id}/status',
  summary: 'Where the campaign stands.',
  request: byIdOrCsv('its samples'),
  responses: orCsv(answersOf(200, StatusShape, 'The state now.')),
});

const streamRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns/{id}/stream',
  summary: 'The same as server-sent events `status`, one at every change.',
  description: 'Ends after 60 s; a client resumes with Last-Event-ID and gets nothing until the state changes.',
  request: {
    params: ID_PARAM,
    query: NO_QUERY,
    headers: z.object({ 'last-event-id': z.string().max(200, { error: 'at most 200 characters' }).optional() }),
  },
  responses: { 200: bodyOf('text/event-stream', 'The stream.'), default: PROBLEM_ANSWER },
});

/** Adds to each sample the id under which its own routes know it. */
export async function readStatus(ports: Ports, campaignId: string): Promise<z.infer<typeof StatusShape>> {
  const [status, samples] = await Promise.all([campaignStatus(ports, campaignId), listSamples(ports, campaignId)]);
  const ids = new Map(samples.map(({ sample, id }) => [sample, id]));
  return { ...status, samples: status.samples.map((s) => ({ id: ids.get(s.sample) ?? '', ...s })) };
}

export function addStatusRoutes(app: ApiApp, ports: Ports, times: StreamTimes): void {
  app.openapi(statusRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    const status = await readStatus(ports, campaign.id);
    if (c.req.valid('query').format === 'csv')
      return answerCsv(c, 'samples', columnsOf(StatusShape.shape.samples.element), status.samples);
    return c.json(status, 200);
  });
  app.openapi(streamRoute, async (c) => {
    const { id } = await requireCampaign(c, ports, c.req.valid('param').id);
    const { lab } = c.get('access');
    const load = async () => {
      const campaign = await findCampaign(ports, id, lab);
      return campaign && { revision: campaign.revision, status: await readStatus(ports, id) };
    };
    return streamStatus(c, load, ports.clock, times);
  });
}
