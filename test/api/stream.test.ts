import { afterAll, beforeAll, expect, test } from 'vitest';
import { type Body, type Harness, openHarness } from './harness.ts';
import { smallCampaign } from './small-campaign.ts';

let api: Harness;
let id: string;
beforeAll(async () => {
  api = await openHarness({ stream: { pollMs: 5, lifeMs: 300 } });
  id = (await api.sendJson('POST', '/v1/campaigns', { name: 'streamed' })).body.id;
});
afterAll(() => api.close());

/** Events of a stream text: blank line between events, `field: value` lines (HTML standard, 9.2.6). */
function eventsOf(text: string): { event: string; id: string; data: Body }[] {
  return text
    .split('\n\n')
    .filter((block) => block.trim() !== '')
    .map((block) => {
      const fields = Object.fromEntries(block.split('\n').map((line) => line.split(/: (.*)/s).slice(0, 2)));
      return { event: fields.event, id: fields.id, data: JSON.parse(fields.data) };
    });
}

const open = (headers: Record<string, string> = {}) => api.send('GET', `/v1/campaigns/${id}/stream`, { headers });

test('says the state at once, then each change, and ends by itself', async () => {
  const response = await open();
  expect(response.headers.get('content-type')).toMatch(/^text\/event-stream/);
  const [path, bytes] = [...smallCampaign([10])][0];
  const text = response.text();
  await new Promise((resolve) => setTimeout(resolve, 50));
  await api.upload(id, path, bytes);
  const events = eventsOf(await text);
  expect(events.length).toBeGreaterThanOrEqual(2);
  expect(events[0].event).toBe('status');
  expect(events[0].data.settled).toBe(true);
  expect(events.at(-1)?.data.settled).toBe(false);
  expect(new Set(events.map((e) => e.id)).size).toBe(events.length);
  const { body } = await api.get(`/v1/campaigns/${id}/status`);
  expect(Object.keys(events[0].data)).toEqual(Object.keys(body));
});

test('resumed with Last-Event-ID it repeats nothing while nothing changes', async () => {
  const last = eventsOf(await (await open()).text()).at(-1)?.id as string;
  expect(eventsOf(await (await open({ 'last-event-id': last })).text())).toEqual([]);
  expect(eventsOf(await (await open({ 'last-event-id': 'older' })).text()).map((e) => e.id)).toEqual([last]);
});

test('ends when the campaign is deleted', async () => {
  const text = (await open()).text();
  await api.send('DELETE', `/v1/campaigns/${id}?confirm=streamed`);
  await expect(text).resolves.toMatch(/^event: status/);
});
