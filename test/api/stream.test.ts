import { afterAll, beforeAll, expect, test } from 'vitest';
import { type Body, type Harness, openHarness } from './harness.ts';
import { smallCampaign } from './small-campaign.ts';

let api: Harness;
let id: string;
/** How long a stream lives; read when it is opened. */
const times = { pollMs: 5, lifeMs: 300 };
beforeAll(async () => {
  api = await openHarness({ stream: times });
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

/** Reads on until the text holds `wanted`. */
async function readUntil(reader: ReadableStreamDefaultReader<string>, before: string, wanted: RegExp): Promise<string> {
  for (let text = before; ; ) {
    if (wanted.test(text)) return text;
    const { value, done } = await reader.read();
    if (done) throw new Error(`the stream ended with ${text}`);
    text += value;
  }
}

test('says the state at once, then each change', async () => {
  times.lifeMs = 20_000;
  const response = await open();
  times.lifeMs = 300;
  expect(response.headers.get('content-type')).toMatch(/^text\/event-stream/);
  const reader = (response.body as ReadableStream<BufferSource>).pipeThrough(new TextDecoderStream()).getReader();
  const first = await readUntil(reader, '', /\n\n/);
  const [path, bytes] = [...smallCampaign([10])][0];
  await api.upload(id, path, bytes);
  const events = eventsOf(await readUntil(reader, first, /"settled":false.*\n\n/s));
  await reader.cancel();
  expect(events.length).toBeGreaterThanOrEqual(2);
  expect(events[0].event).toBe('status');
  expect(events[0].data.settled).toBe(true);
  expect(events.at(-1)?.data.settled).toBe(false);
  expect(new Set(events.map((e) => e.id)).size).toBe(events.length);
  const { body } = await api.get(`/v1/campaigns/${id}/status`);
  expect(Object.keys(events[0].data)).toEqual(Object.keys(body));
});

test('ends by itself; resumed with Last-Event-ID it repeats nothing while nothing changes', async () => {
  const last = eventsOf(await (await open()).text()).at(-1)?.id as string;
  expect(eventsOf(await (await open({ 'last-event-id': last })).text())).toEqual([]);
  expect(eventsOf(await (await open({ 'last-event-id': 'older' })).text()).map((e) => e.id)).toEqual([last]);
});

test('ends when the campaign is deleted', async () => {
  const text = (await open()).text();
  await api.send('DELETE', `/v1/campaigns/${id}?confirm=streamed`);
  await expect(text).resolves.toMatch(/^event: status/);
});
