import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
import { createRandom } from '../../jobs/numeric/random.ts';
import { createCampaign } from '../../jobs/store/index.ts';
import { makeZip } from '../instrument/zip-file.ts';
import { drain, openTestPorts, rowsOf, send, type TestPorts } from '../runner/test-ports.ts';
import { type Body, HOST } from './harness.ts';

let ports: TestPorts;
let app: ReturnType<typeof createApp>;
let campaign: string;
const ids: Record<string, string> = {};
const troubles: unknown[] = [];

beforeAll(async () => {
  ports = await openTestPorts();
  const observer = {
    request: () => {},
    job: () => {},
    figures: () => '',
    trouble: (...all: unknown[]) => troubles.push(all),
  };
  app = createApp(ports, { access: { port: () => 8787 }, observer });
  campaign = (await createCampaign(ports, 'trial')).id;
  for (const rate of [1, 2, 3]) await send(ports, campaign, `A/oven/${rate}.txt`, `rate ${rate}`);
  await drain(ports);
  ids['campaign'] = campaign;
  ids['sample'] = (await json('GET', `/v1/campaigns/${campaign}/status`)).samples[0].id;
  ids['scan'] = (await json('GET', `/v1/samples/${ids['sample']}`)).scans[0].id;
  ids['job'] = (await json('GET', '/v1/jobs')).items[0].id;
}, 30_000);
afterAll(() => ports.close());

const ask = async (method: string, path: string, body?: BodyInit, headers: Record<string, string> = {}) =>
  app.request(`http://${HOST}${path}`, { method, body, headers: { host: HOST, ...headers } });
const json = async (method: string, path: string): Promise<Body> => (await ask(method, path)).json();
const put = (path: string, bytes: Uint8Array) =>
  ask('PUT', `/v1/campaigns/${campaign}/files?path=${encodeURIComponent(path)}`, bytes as BodyInit, {
    'content-length': String(bytes.length),
  });
const tables = async () =>
  JSON.stringify([await rowsOf(ports, campaign, 'scans'), await rowsOf(ports, campaign, 'parameters')]);

describe('paths', () => {
  // The rules are the project’s own; the ways around them are common practice, no source.
  test.each([
    '../../etc/passwd',
    '/etc/passwd',
    'A/../../x.txt',
    'A/./x.txt',
    'A//x.txt',
    'A\\x.txt',
    'A/x\u0000.txt',
    'A/x\r\nSet-Cookie: a=b',
    '=cmd/oven/x.txt',
    'A/@x.txt',
    `${'a'.repeat(513)}`,
    'A/e\u0301.txt',
    '',
  ])('%j is refused and stores nothing', async (path) => {
    const response = await put(path, new TextEncoder().encode('rate 1'));
    expect(response.status).toBe(422);
    expect(response.headers.get('set-cookie')).toBeNull();
  });
  test.each(['%2e%2e%2f%2e%2e%2fetc%2fpasswd', '%c0%af', '%00', 'a%5cb'])('also written as %s', async (path) => {
    const response = await ask('PUT', `/v1/campaigns/${campaign}/files?path=${path}`, 'x', { 'content-length': '1' });
    expect(response.status).toBe(422);
  });
  test.each(['/v1/../../etc/passwd', '/v1/scans/..%2f..%2fetc/original', '/%2e%2e/%2e%2e/etc/passwd', '/v1/%00'])(
    'a route %s leads nowhere',
    async (path) => {
      expect((await ask('GET', path)).status).toBeOneOf([404, 422]);
    },
  );
});

test('an archive that unpacks to far more than it is gets set aside with the reason, in bounded time', async () => {
  const bomb = makeZip([{ name: 'A/oven/bomb.txt', data: new Uint8Array(30e6) }]);
  expect(bomb.length).toBeLessThan(100_000);
  expect((await put('bomb.zip', bomb)).status).toBe(202);
  await drain(ports);
  const [row] = (await rowsOf(ports, campaign, 'scans')).filter((r) => r['file'] === 'bomb.zip');
  expect(row).toMatchObject({ status: 'set_aside', reason: expect.stringMatching(/more than 200-fold/) });
});

// Each of these closes a string or a statement of SQL, or means something to a pattern.
const METACHARACTERS = [
  `'; drop table campaigns; --`,
  `" or 1=1 --`,
  `%' or '1'='1`,
  `\\'; delete from jobs; --`,
  `_%_`,
  `?1`,
  `\${sql}`,
  `');--`,
];

test.each(METACHARACTERS)('%s is a name like any other', async (name) => {
  const before = await tables();
  const headers = { 'content-type': 'application/json' };
  const made = await ask('POST', '/v1/campaigns', JSON.stringify({ name }), headers);
  expect(made.status).toBe(201);
  const { id } = (await made.json()) as Body;
  expect((await json('GET', `/v1/campaigns/${encodeURIComponent(name)}`)).id).toBe(id);
  const sample = encodeURIComponent(name);
  for (const table of ['parameters', 'scans', 'flags']) {
    const page = await json('GET', `/v1/campaigns/${campaign}/${table}?sample=${sample}`);
    expect(page.items).toEqual([]);
  }
  expect((await json('GET', `/v1/jobs?after=${sample}`)).items.length).toBeGreaterThanOrEqual(0);
  expect(await tables()).toBe(before);
});

test('what comes in a header goes into no header', async () => {
  const evil = 'x\r\nset-cookie: a=b';
  expect(() => new Headers({ 'idempotency-key': evil })).toThrow();
  const response = await ask('GET', `/v1/campaigns/${encodeURIComponent(evil)}`);
  expect(response.status).toBe(404);
  expect([...response.headers].filter(([, value]) => value.includes('set-cookie'))).toEqual([]);
  const original = await ask('GET', `/v1/scans/${ids['scan']}/original`);
  expect(original.headers.get('content-disposition')).toMatch(/^attachment; filename\*=UTF-8''[\w.%-]+$/);
});

const REFERENCES = /^#\/components\/schemas\/(.+)$/;

/** Values that a request may hold, right and wrong, drawn from the schema of the document. */
function drawValue(schema: Body, document: Body, random: ReturnType<typeof createRandom>, depth = 0): unknown {
  const reference = REFERENCES.exec(schema?.$ref ?? '')?.[1];
  if (reference) return drawValue(document.components.schemas[reference], document, random, depth);
  const odd = [
    null,
    '',
    -1,
    1e308,
    0.1,
    true,
    [],
    {},
    'a'.repeat(300),
    `'"\\;--`,
    '\u0000',
    '💥',
    [[[]]],
    { a: { b: 1 } },
  ];
  if (random.uniform() < 0.3) return odd[random.integer(odd.length)];
  if (schema?.enum) return schema.enum[random.integer(schema.enum.length)];
  if (schema?.anyOf) return drawValue(schema.anyOf[random.integer(schema.anyOf.length)], document, random, depth);
  if (schema?.properties && depth < 4) {
    const entries = Object.entries<Body>(schema.properties).filter(() => random.uniform() < 0.7);
    return Object.fromEntries(entries.map(([name, s]) => [name, drawValue(s, document, random, depth + 1)]));
  }
  if (schema?.items && depth < 4)
    return Array.from({ length: random.integer(4) }, () => drawValue(schema.items, document, random, depth + 1));
  const type = [schema?.type].flat()[0];
  if (type === 'number' || type === 'integer') return [0, 1, 2, 500, 1e6, -273.15, 1.5][random.integer(7)];
  if (type === 'boolean') return random.uniform() < 0.5;
  return ['trial', campaign, 'A', 'films', '2'][random.integer(5)];
}

const REQUESTS = 400;

// Property: whatever is asked, the answer is a success or a problem that says why, never a failure of ours.
test('random requests drawn from the document: no 500', { timeout: 60_000 }, async () => {
  const document = await json('GET', '/v1/openapi.json');
  const random = createRandom('hostile requests');
  const operations = Object.entries<Body>(document.paths).flatMap(([route, methods]) =>
    Object.entries<Body>(methods).map(([method, operation]) => ({ route, method, operation })),
  );
  const failures: string[] = [];
  const statuses = new Set<number>();
  for (let n = 0; n < REQUESTS; n++) {
    const { route, method, operation } = operations[random.integer(operations.length)];
    if (route.endsWith('/stream') || (method === 'delete' && random.uniform() < 0.9)) continue;
    const kind = /^\/v1\/(\w+)s\//.exec(route)?.[1] ?? 'campaign';
    const id =
      random.uniform() < 0.8 ? (ids[kind] ?? 'i_1') : encodeURIComponent(String(drawValue({}, document, random)));
    const query = new URLSearchParams();
    for (const p of operation.parameters ?? []) {
      if (p.in === 'query' && random.uniform() < 0.6)
        query.append(p.name, String(drawValue(p.schema, document, random)));
    }
    if (random.uniform() < 0.05) query.append('unknown', '1');
    const content = operation.requestBody?.content ?? {};
    const type = Object.keys(content)[0];
    let body: string | undefined;
    if (type && random.uniform() < 0.95)
      body = random.uniform() < 0.1 ? '{"cut' : JSON.stringify(drawValue(content[type].schema, document, random));
    const headers: Record<string, string> = {};
    if (type && random.uniform() < 0.9) headers['content-type'] = type;
    if (body !== undefined && random.uniform() < 0.8)
      headers['content-length'] = String(new TextEncoder().encode(body).length);
    if (random.uniform() < 0.1) headers['idempotency-key'] = `key-${random.integer(5)}`;
    if (random.uniform() < 0.1) headers['if-none-match'] = '*';
    const path = `${route.replace('{id}', id)}?${query}`;
    const response = await ask(method.toUpperCase(), path, body, headers);
    const text = await response.text();
    statuses.add(response.status);
    if (response.status >= 500) failures.push(`${method} ${path} ${body}: ${response.status} ${text}`);
    if (response.status >= 400 && response.headers.get('content-type') !== 'application/problem+json')
      failures.push(`${method} ${path}: ${response.status} is no problem document`);
  }
  expect(failures.slice(0, 5)).toEqual([]);
  expect(troubles).toEqual([]);
  // The control: requests of many kinds came through and were refused.
  for (const status of [200, 202, 404, 409, 422]) expect([...statuses]).toContain(status);
});
