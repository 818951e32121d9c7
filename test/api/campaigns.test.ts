import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { CampaignShape } from '../../api/shapes/campaign.ts';
import { type Body, type Harness, openHarness } from './harness.ts';

let api: Harness;
beforeAll(async () => {
  api = await openHarness();
});
afterAll(() => api.close());

const json = { 'content-type': 'application/json' };

test('a campaign is made, found by id and by name, renamed and deleted', async () => {
  const made = await api.send('POST', '/v1/campaigns', { body: '{"name":"one & two/three"}', headers: json });
  expect(made.status).toBe(201);
  const campaign = CampaignShape.strict().parse(await made.json());
  expect(made.headers.get('location')).toBe(`/v1/campaigns/${campaign.id}`);
  expect(Math.abs(Date.parse(campaign.created_at) - Date.now())).toBeLessThan(10_000);

  expect((await api.get(`/v1/campaigns/${campaign.id}`)).body).toEqual({ ...campaign, instruments: [] });
  expect((await api.get(`/v1/campaigns/${encodeURIComponent('one & two/three')}`)).body).toMatchObject(campaign);

  const renamed = await api.sendJson('PATCH', `/v1/campaigns/${campaign.id}`, { name: 'four' });
  expect(renamed.body).toMatchObject({ id: campaign.id, name: 'four' });
  expect((await api.get('/v1/campaigns/four')).body.id).toBe(campaign.id);

  expect((await api.send('DELETE', `/v1/campaigns/${campaign.id}?confirm=four`)).status).toBe(204);
  expect((await api.get(`/v1/campaigns/${campaign.id}`)).status).toBe(404);
});

test('pages hold every campaign once', async () => {
  for (let i = 0; i < 5; i++) await api.sendJson('POST', '/v1/campaigns', { name: `page ${i}` });
  const seen: string[] = [];
  let after = '';
  let pages = 0;
  for (let next: string | null = ''; next !== null; pages++) {
    const { body } = await api.get(`/v1/campaigns?limit=2${after}`);
    seen.push(...body.items.map((c: { name: string }) => c.name));
    next = body.next;
    after = `&after=${next}`;
  }
  expect(seen.sort()).toEqual([0, 1, 2, 3, 4].map((i) => `page ${i}`));
  expect(pages).toBe(3);
});

test('an empty campaign is settled and has empty tables', async () => {
  const { body } = await api.sendJson('POST', '/v1/campaigns', { name: 'empty' });
  const status = (await api.get(`/v1/campaigns/${body.id}/status`)).body;
  expect(status).toMatchObject({ settled: true, samples: [] });
  expect(Object.values(status.scans)).toEqual([0, 0, 0, 0, 0, 0, 0, 0]);
  for (const table of ['coverage', 'gaps', 'flags', 'parameters', 'scans', 'instruments', 'conversion']) {
    expect((await api.get(`/v1/campaigns/${body.id}/${table}`)).body).toEqual({ items: [], next: null });
    const csv = await api.send('GET', `/v1/campaigns/${body.id}/${table}?format=csv`);
    expect((await csv.text()).split('\n').length).toBe(2);
  }
});

test('a file under its other name, packed or plain, is told in the answer and in the row of the older one', async () => {
  const { id } = (await api.sendJson('POST', '/v1/campaigns', { name: 'names' })).body;
  const bytes = (text: string) => new TextEncoder().encode(text);
  expect((await api.upload(id, 'A/oven/1.txt.gz', gzipSync('first'))).body).not.toHaveProperty('replaces');
  await api.drain();
  const plain = (await api.upload(id, 'A/oven/1.txt', bytes('second'))).body;
  expect(plain).toMatchObject({ outcome: 'replaced', replaces: 'A/oven/1.txt.gz' });
  expect((await api.upload(id, 'A/oven/1.txt', bytes('third'))).body).not.toHaveProperty('replaces');
  const packed = (await api.upload(id, 'A/oven/1.txt.gz', gzipSync('fourth'))).body;
  expect(packed).toMatchObject({ outcome: 'archive', replaces: 'A/oven/1.txt' });
  await api.drain();
  const { items } = (await api.get(`/v1/campaigns/${id}/scans`)).body;
  expect(items.map((row: Body) => row.status).sort()).toEqual(['set_aside', 'superseded', 'superseded', 'superseded']);
  const reasons = items.filter((row: Body) => row.status === 'superseded').map((row: Body) => row.reason);
  // The first came under the name that counts now.
  expect(reasons.filter((reason: string | null) => reason === null)).toHaveLength(1);
  expect(new Set(reasons)).toEqual(new Set([null, '«A/oven/1.txt.gz» came later and stands in its place']));
});
