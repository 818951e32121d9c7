import { afterAll, beforeAll, expect, it } from 'vitest';
import { type Body, type Harness, openHarness } from './harness.ts';
import { smallCampaign } from './small-campaign.ts';

let api: Harness;
let oven: Body;

beforeAll(async () => {
  api = await openHarness();
  const { id } = (await api.sendJson('POST', '/v1/campaigns', { name: 'instruments' })).body;
  for (const [path, bytes] of smallCampaign()) await api.upload(id, path, bytes);
  await api.drain();
  [oven] = (await api.get(`/v1/campaigns/${id}`)).body.instruments;
}, 60_000);
afterAll(() => api.close());

it('a campaign names its instruments, and each has its row and its curves', async () => {
  expect(oven.instrument).toBe('oven');
  const { status, body } = await api.get(`/v1/instruments/${oven.id}`);
  expect(status).toBe(200);
  expect(body.row).toMatchObject({ instrument: 'oven', source: 'sheet', standards: 0 });
  const curves = (await api.get(`/v1/instruments/${oven.id}/curves?kind=calibration`)).body;
  // Without standards there is nothing to draw.
  expect(curves).toMatchObject({ kind: 'calibration', x: { unit: 'K/s' }, y: { unit: 'K' }, series: [] });
});

it('refuses an instrument or a kind that is not there', async () => {
  expect((await api.get('/v1/instruments/i_none')).status).toBe(404);
  expect((await api.get(`/v1/instruments/${oven.id}/curves?kind=lag`)).status).toBe(422);
});
