import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
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
