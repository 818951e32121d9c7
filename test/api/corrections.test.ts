import { afterAll, beforeAll, expect, it } from 'vitest';
import { type Body, type Harness, openHarness } from './harness.ts';
import { smallCampaign } from './small-campaign.ts';

let api: Harness;
let campaign: string;
let scanId: string;

beforeAll(async () => {
  api = await openHarness();
  campaign = (await api.sendJson('POST', '/v1/campaigns', { name: 'corrections' })).body.id;
  for (const [path, bytes] of smallCampaign()) {
    const { body } = await api.upload(campaign, path, bytes);
    if (path.endsWith('at-10.csv')) scanId = body.scan_ids[0];
  }
  await api.drain();
}, 60_000);
afterAll(() => api.close());

const kissinger = async (): Promise<Body> =>
  (await api.get(`/v1/campaigns/${campaign}/parameters?quantity=activation_energy&method=kissinger`)).body.items[0];

it('corrects direction, limits and mass of a scan, computes it again, and keeps the history', async () => {
  const before = await kissinger();
  expect(before.scan_count).toBe(5);
  const answer = await api.sendJson('PATCH', `/v1/scans/${scanId}`, { mass_mg: 20, note: 'weighed again' });
  expect(answer.status).toBe(202);
  expect(answer.body.corrections).toEqual({ mass_mg: 20, note: 'weighed again' });
  await api.drain();
  const scan = (await api.get(`/v1/scans/${scanId}`)).body;
  // Twice the mass: half the enthalpy per gram. Kinetics does not need the mass.
  expect(scan.rows[0]).toMatchObject({ mass_mg: 20, status: 'reduced' });
  expect(scan.rows[0].enthalpy_J_per_g).toBeGreaterThan(17);
  expect(scan.rows[0].enthalpy_J_per_g).toBeLessThan(23);
  expect((await kissinger()).value).toBeCloseTo(before.value, 6);
  const { items } = (await api.get(`/v1/scans/${scanId}/history`)).body;
  expect(items).toMatchObject([
    { field: 'mass_mg', before: 10, after: 20, cause: 'correction' },
    { field: 'note', before: null, after: 'weighed again' },
  ]);
});

it('keeps a scan out and takes it back', async () => {
  await api.sendJson('PATCH', `/v1/scans/${scanId}`, { excluded: 'leaking pan' });
  await api.drain();
  expect((await api.get(`/v1/scans/${scanId}`)).body.rows[0]).toMatchObject({
    status: 'excluded',
    reason: 'leaking pan',
  });
  expect((await kissinger()).scan_count).toBe(4);
  await api.sendJson('PATCH', `/v1/scans/${scanId}`, { excluded: null });
  await api.drain();
  expect((await kissinger()).scan_count).toBe(5);
});

it.each([
  [{ mass: 3 }, 'mass'],
  [{ mass_mg: -1 }, 'mass_mg'],
  [{ limits_K: [600, 500] }, 'limits_K'],
  [{ segment: 0 }, 'segment'],
  [{ sample: '=1+1' }, 'sample'],
  [{ role: 'reference' }, 'role'],
])('refuses %j and names the field', async (body, field) => {
  const answer = await api.sendJson('PATCH', `/v1/scans/${scanId}`, body);
  expect(answer.status).toBe(422);
  expect(answer.body.field).toBe(field);
});

it('answers 404 for a scan that is not there', async () => {
  expect((await api.sendJson('PATCH', '/v1/scans/s_none', { mass_mg: 1 })).status).toBe(404);
  expect((await api.get('/v1/scans/s_none/history')).status).toBe(404);
});
