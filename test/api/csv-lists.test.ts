import { afterAll, beforeAll, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
import { drain, openTestPorts, send, type TestPorts } from '../runner/test-ports.ts';
import { csvRecords } from './csv-cells.ts';
import { operationsOf } from './draw-request.ts';
import { type Body, HOST } from './harness.ts';

let ports: TestPorts;
let ask: (path: string, init?: RequestInit) => Promise<Response>;
const get = async (path: string): Promise<Body> => (await ask(path)).json();
let ids: Record<'campaign' | 'sample' | 'scan' | 'instrument', string>;

beforeAll(async () => {
  ports = await openTestPorts();
  const app = createApp(ports, { access: { port: () => 8787 } });
  ask = async (path, init = {}) =>
    app.request(`http://${HOST}${path}`, { ...init, headers: { host: HOST, ...(init.headers as object) } });
  const json = (method: string, path: string, body: unknown) =>
    ask(path, { method, body: JSON.stringify(body), headers: { 'content-type': 'application/json' } });
  const made = await (await json('POST', '/v1/campaigns', { name: 'films, "thin"' })).json();
  await json('POST', '/v1/campaigns', { name: 'spare' });
  for (const rate of [1, 2, 3]) await send(ports, made.id, `A/oven/${rate}.txt`, `rate ${rate}`);
  await drain(ports);
  const { samples } = await get(`/v1/campaigns/${made.id}/status`);
  const scan = (await get(`/v1/samples/${samples[0].id}`)).scans[0].id;
  await json('PATCH', `/v1/scans/${scan}`, { limits_K: [401.5, 440], note: 'tied "by hand"' });
  const { instruments } = await get(`/v1/campaigns/${made.id}`);
  ids = { campaign: made.id, sample: samples[0].id, scan, instrument: instruments[0].id };
});
afterAll(() => ports.close());

/** The rule as the document states it. */
function cellOf(value: unknown): string {
  if (value === null || value === undefined) return '';
  if (Array.isArray(value) && value.every((v) => typeof v !== 'object')) return value.join(';');
  return typeof value === 'object' ? JSON.stringify(value) : String(value);
}

/** Where an answer has its list. */
const LISTS: Record<string, string> = {
  '/v1/campaigns': 'items',
  '/v1/campaigns/{id}': 'instruments',
  '/v1/campaigns/{id}/status': 'samples',
  '/v1/samples/{id}': 'scans',
  '/v1/scans/{id}': 'rows',
  '/v1/scans/{id}/history': 'items',
  '/v1/jobs': 'items',
};

/** Several lists at once: each has a route of its own. */
const SEVERAL = ['/v1/campaigns/{id}/overview'];

test('every route that gives a list documents its CSV', async () => {
  const document = await get('/v1/openapi.json');
  const resolve = (schema: Body): Body =>
    schema?.$ref ? document.components.schemas[schema.$ref.split('/').at(-1)] : schema;
  const listed: string[] = [];
  for (const { method, route, operation } of operationsOf(document)) {
    const [, answer] = Object.entries<Body>(operation.responses).find(([status]) => Number(status) < 300)!;
    const fields = Object.entries<Body>(resolve(answer.content?.['application/json']?.schema)?.properties ?? {});
    const isList = fields.some(([name, { items }]) => name === 'items' || (method === 'get' && items));
    if (!isList || SEVERAL.includes(route)) continue;
    listed.push(route);
    expect(Object.keys(answer.content), route).toEqual(['application/json', 'text/csv']);
    expect(operation.parameters.find((p: Body) => p.name === 'format')?.schema.enum, route).toEqual(['json', 'csv']);
  }
  expect(listed).toEqual(expect.arrayContaining([...Object.keys(LISTS), '/v1/samples/{id}/curves']));
  expect(document.info.description).toContain('?format=csv');
});

test.each(Object.entries(LISTS))('%s: each cell is the value of its key', async (route, list) => {
  const kind = /^\/v1\/(\w+)s/.exec(route)?.[1] as keyof typeof ids;
  const path = route.replace('{id}', ids[kind]);
  const rows: Body[] = (await get(path))[list];
  const response = await ask(`${path}?format=csv`);
  expect(response.headers.get('content-type')).toBe('text/csv; charset=utf-8; header=present');
  const [columns, ...records] = csvRecords(await response.text());
  expect(rows.length).toBeGreaterThan(0);
  for (const key of rows.flatMap(Object.keys)) expect(columns).toContain(key);
  expect(records).toEqual(rows.map((row) => columns.map((column) => cellOf(row[column]))));
});

test('a list in pages comes whole, and one without items has its columns', async () => {
  const [columns, ...records] = csvRecords(await (await ask('/v1/campaigns?format=csv&limit=1')).text());
  expect(records).toHaveLength(2);
  expect(records.map((r) => r[columns.indexOf('name')]).sort()).toEqual(['films, "thin"', 'spare']);
  expect(await (await ask('/v1/jobs?state=failed&format=csv')).text()).toMatch(/^id,campaign_id,step,[^\n]*\n$/);
});

test('what became of a form of files comes as CSV; the same key with another format is another request', async () => {
  const post = async (format: string) => {
    const form = new FormData();
    form.append('files[]', new File(['rate 4'], 'A/oven/4.txt'));
    const made = new Request('http://x/', { method: 'POST', body: form });
    const body = await made.arrayBuffer();
    return ask(`/v1/campaigns/${ids.campaign}/scans?format=${format}`, {
      method: 'POST',
      body,
      headers: {
        'content-type': made.headers.get('content-type')!,
        'content-length': String(body.byteLength),
        'idempotency-key': 'one-key',
      },
    });
  };
  const csv = await post('csv');
  expect(csv.status).toBe(202);
  const [columns, record] = csvRecords(await csv.text());
  expect(record[columns.indexOf('file')]).toBe('A/oven/4.txt');
  expect(record[columns.indexOf('outcome')]).toBe('accepted');
  expect((await (await post('json')).json()).type).toContain('#key-reused');
});
