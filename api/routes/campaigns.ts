import { createRoute } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import {
  CAMPAIGN_NAME_LIMIT,
  createCampaign,
  deleteCampaign,
  listCampaigns,
  listInstruments,
  refitCampaign,
  renameCampaign,
  setGoals,
} from '../../jobs/store/index.ts';
import { quote } from '../../schema/wire/flags.ts';
import { answerCsv, byIdOrCsv, columnsOf, everyItem, formatQuery, orCsv } from '../csv-lists.ts';
import { jsonById, jsonToList } from '../json-body.ts';
import {
  type ApiApp,
  answersOf,
  BY_ID,
  ID_PARAM,
  listOf,
  PAGE_QUERY,
  PROBLEM_ANSWER,
  strict,
  textOf,
} from '../openapi.ts';
import { Problem } from '../problems.ts';
import { pageOf, requireCampaign } from '../results.ts';
import { CampaignShape, campaignBody } from '../shapes/campaign.ts';
import { GoalsShape, goalRowOf } from '../shapes/forecasts.ts';

const NewBody = strict({ name: textOf(CAMPAIGN_NAME_LIMIT), goals: GoalsShape.optional() });
const NameBody = strict({ name: textOf(CAMPAIGN_NAME_LIMIT) });
const GoalsBody = strict({ goals: GoalsShape });
/** A list does not tell the instruments of its campaigns. */
const LIST_COLUMNS = columnsOf(CampaignShape.omit({ instruments: true }));

const createCampaignRoute = createRoute({
  method: 'post',
  path: '/v1/campaigns',
  summary: 'Make a campaign. A name that is taken is refused with 409.',
  ...jsonToList(NewBody),
  responses: answersOf(201, CampaignShape, 'The new campaign.'),
});

const listRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns',
  summary: 'Campaigns, ordered by id.',
  request: { query: strict({ ...PAGE_QUERY, ...formatQuery('every campaign, whatever limit and after say') }) },
  responses: orCsv(answersOf(200, listOf(CampaignShape), 'A page of campaigns.')),
});

const getRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns/{id}',
  summary: 'One campaign, by id or name.',
  request: byIdOrCsv('its instruments'),
  responses: orCsv(answersOf(200, CampaignShape, 'The campaign.')),
});

const renameRoute = createRoute({
  method: 'patch',
  path: '/v1/campaigns/{id}',
  summary: 'Give a campaign another name.',
  ...jsonById(NameBody),
  responses: answersOf(200, CampaignShape, 'The campaign as it is now.'),
});

const deleteRoute = createRoute({
  method: 'delete',
  path: '/v1/campaigns/{id}',
  summary: 'Delete a campaign with everything in it.',
  request: {
    params: ID_PARAM,
    query: strict({
      confirm: textOf(CAMPAIGN_NAME_LIMIT).openapi({ description: 'The name of the campaign, to be sure.' }),
    }),
  },
  responses: { 204: { description: 'Gone.' }, default: PROBLEM_ANSWER },
});

const refitRoute = createRoute({
  method: 'post',
  path: '/v1/campaigns/{id}/refit',
  summary: 'Queue the fit of every sample again.',
  request: BY_ID,
  responses: answersOf(202, CampaignShape, 'The campaign, with fits queued.'),
});

const goalsRoute = createRoute({
  method: 'put',
  path: '/v1/campaigns/{id}/goals',
  summary: 'Put these goals in the place of those set before; those of goal.csv stay. The forecasts follow.',
  ...jsonById(GoalsBody),
  responses: answersOf(202, GoalsBody, 'The goals as they are kept.'),
});

export function addCampaignRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(createCampaignRoute, async (c) => {
    const { name, goals = [] } = c.req.valid('json');
    const campaign = await createCampaign(ports, name, c.get('access').lab);
    if (goals.length > 0) await setGoals(ports, campaign.id, goals.map(goalRowOf));
    return c.json(campaignBody(campaign), 201, { location: `/v1/campaigns/${campaign.id}` });
  });

  app.openapi(listRoute, async (c) => {
    const { limit, after, format } = c.req.valid('query');
    const { lab } = c.get('access');
    const load = (page: { limit: number; after?: string }) => listCampaigns(ports, { lab, ...page });
    if (format === 'csv') return answerCsv(c, 'campaigns', LIST_COLUMNS, everyItem(load, campaignBody));
    return c.json(pageOf(await load({ after, limit: limit + 1 }), limit, campaignBody), 200);
  });

  app.openapi(getRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    const instruments = (await listInstruments(ports, campaign.id)).map(({ id, instrument }) => ({ id, instrument }));
    if (c.req.valid('query').format === 'csv') return answerCsv(c, 'instruments', ['id', 'instrument'], instruments);
    return c.json({ ...campaignBody(campaign), instruments }, 200);
  });

  app.openapi(renameRoute, async (c) => {
    const { id } = await requireCampaign(c, ports, c.req.valid('param').id);
    return c.json(campaignBody(await renameCampaign(ports, id, c.req.valid('json').name)), 200);
  });

  app.openapi(deleteRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    const { confirm } = c.req.valid('query');
    if (confirm !== campaign.name)
      throw new Problem(
        'invalid-input',
        `query: confirm is ${quote(confirm)}; allowed: the name of the campaign, ${quote(campaign.name)}`,
        {
          field: 'confirm',
        },
      );
    await deleteCampaign(ports, campaign.id);
    return c.body(null, 204);
  });

  app.openapi(goalsRoute, async (c) => {
    const { id } = await requireCampaign(c, ports, c.req.valid('param').id);
    const { goals } = c.req.valid('json');
    await setGoals(ports, id, goals.map(goalRowOf));
    return c.json({ goals }, 202);
  });

  app.openapi(refitRoute, async (c) => {
    const { id } = await requireCampaign(c, ports, c.req.valid('param').id);
    await refitCampaign(ports, id);
    return c.json(campaignBody(await requireCampaign(c, ports, id)), 202);
  });
}
