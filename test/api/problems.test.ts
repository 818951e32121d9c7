import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { PROBLEMS } from '../../api/problems.ts';
import type { Observer } from '../../jobs/ports/index.ts';
import { type Harness, HOST, openHarness } from './harness.ts';

let api: Harness;
let id: string;
beforeAll(async () => {
  api = await openHarness();
  id = (await api.sendJson('POST', '/v1/campaigns', { name: 'there' })).body.id;
});
afterAll(() => api.close());

/** One shape for every route (RFC 9457): media type, members, and the status in the body equal to that of the answer. */
async function expectProblem(response: Response, code: keyof typeof PROBLEMS, detail: RegExp, field?: string) {
  const [status, title, action] = PROBLEMS[code];
  expect(response.status).toBe(status);
  expect(response.headers.get('content-type')).toBe('application/problem+json');
  expect(response.headers.get('x-content-type-options')).toBe('nosniff');
  const body = await response.json();
  expect(body).toMatchObject({ type: `/v1/reference#${code}`, title, status, action });
  expect(body.detail).toMatch(detail);
  expect(body.field).toBe(field);
}

const json = { 'content-type': 'application/json' };
const post = (body: BodyInit, headers: Record<string, string> = json) =>
  api.send('POST', '/v1/campaigns', { body, headers });
const put = (path: string, headers: Record<string, string> = { 'content-length': '1' }) =>
  api.send('PUT', `/v1/campaigns/${id}/files?path=${path}`, { body: 'x', headers });

describe('problems', () => {
  test.each(['/v1', '/v1/', '/v1/nothing', '/v1/campaigns/x/nothing', '/nothing'])('no route %s', async (path) => {
    await expectProblem(await api.send('GET', path), 'not-found', /there is no route GET/);
  });
  test.each(['', '/status', '/stream', '/parameters', '/scans', '/conversion'])('no campaign for …%s', async (rest) => {
    await expectProblem(await api.send('GET', `/v1/campaigns/nope${rest}`), 'not-found', /no campaign «nope»/);
  });
  test.each(['/v1/samples/nope', '/v1/samples/nope/curves?kind=energy', '/v1/scans/nope', '/v1/scans/nope/original'])(
    'nothing at %s',
    async (path) => {
      await expectProblem(await api.send('GET', path), 'not-found', /«nope»/);
    },
  );
  test('no job to retry', async () => {
    await expectProblem(await api.send('POST', '/v1/jobs/nope/retry'), 'not-found', /nope/);
  });

  test('a method that the route does not take', async () => {
    const response = await api.send('DELETE', '/v1/campaigns');
    expect(response.headers.get('allow')?.split(', ').sort()).toEqual(['GET', 'HEAD', 'POST']);
    await expectProblem(response, 'method-not-allowed', /DELETE is not taken here; allowed: /);
  });

  test('a body that is not JSON', async () => {
    await expectProblem(await post('{'), 'malformed-json', /JSON/);
  });
  test('a media type other than JSON', async () => {
    await expectProblem(await post('{"name":"a"}', { 'content-type': 'text/plain' }), 'media-type-refused', /json/);
    await expectProblem(await post(new Blob(['{"name":"a"}']), {}), 'media-type-refused', /json/);
  });
  test('a JSON body beyond 1 MB', async () => {
    await expectProblem(await post(`{"name":"${'a'.repeat(1_000_001)}"}`), 'too-large', /1000000/);
  });
  test('a body with a field that is not known', async () => {
    const response = await post('{"name":"a","colour":"red"}');
    await expectProblem(response, 'invalid-input', /^body: «colour» is not known; known: name, goals$/, 'colour');
  });
  test.each([
    ['{}', /name is missing; allowed: text of 1 to 80 characters/],
    ['{"name":""}', /name is «»; allowed/],
    ['{"name":7}', /name is «7»; allowed/],
    [JSON.stringify({ name: 'x'.repeat(81) }), /name is «x+…?»; allowed/],
    ['{"name":" a"}', /no space at its ends/],
  ])('a name that is not allowed: %s', async (body, detail) => {
    await expectProblem(await post(body), 'invalid-input', detail, 'name');
  });
  test('a body that is not an object', async () => {
    await expectProblem(await post('[1]'), 'invalid-input', /the value is «\[1\]»; allowed: an object with name/);
  });
  test('a name that is taken, on making and on renaming', async () => {
    await expectProblem(await post('{"name":"there"}'), 'name-taken', /there/, 'name');
    await post('{"name":"other"}');
    const rename = await api.send('PATCH', '/v1/campaigns/other', { body: '{"name":"there"}', headers: json });
    await expectProblem(rename, 'name-taken', /there/, 'name');
  });
  test('deleting without the name, or with another', async () => {
    await expectProblem(
      await api.send('DELETE', `/v1/campaigns/${id}`),
      'invalid-input',
      /confirm is missing/,
      'confirm',
    );
    const wrong = await api.send('DELETE', `/v1/campaigns/${id}?confirm=ther`);
    await expectProblem(wrong, 'invalid-input', /confirm is «ther»; allowed: .*«there»/, 'confirm');
  });

  test.each([
    ['limit=0', 'limit', /limit is «0»; allowed: a whole number from 1 to 1000/],
    ['limit=1001', 'limit', /limit is «1001»/],
    ['limit=1.5', 'limit', /limit is «1.5»/],
    ['limit=ten', 'limit', /limit is «ten»/],
    ['limit=1&limit=2', 'limit', /limit is «\["1","2"\]»/],
    ['after=x', 'after', /after is «x»/],
    ['format=xml', 'format', /format is «xml»; allowed: one of json, csv/],
    ['event=0', 'event', /event is «0»; allowed: a whole number from 1/],
    ['colour=red', 'colour', /^query: «colour» is not known; known: .*sample, quantity, method, event/],
  ])('a query ?%s', async (query, field, detail) => {
    await expectProblem(
      await api.send('GET', `/v1/campaigns/${id}/parameters?${query}`),
      'invalid-input',
      detail,
      field,
    );
  });
  test.each(['/healthz', '/readyz', '/v1/openapi.json', '/v1/reference', '/v1/jobs', '/v1/campaigns'])(
    'an unknown query parameter on %s',
    async (path) => {
      await expectProblem(await api.send('GET', `${path}?colour=red`), 'invalid-input', /«colour»/, 'colour');
    },
  );
  test('a state or kind outside its list', async () => {
    const jobs = await api.send('GET', '/v1/jobs?state=lost');
    await expectProblem(jobs, 'invalid-input', /one of queued, running, done, failed/, 'state');
    const curves = await api.send('GET', '/v1/samples/x/curves');
    await expectProblem(curves, 'invalid-input', /kind is missing; allowed: one of thermogram/, 'kind');
  });

  test('a file without Content-Length, or with a broken one', async () => {
    await expectProblem(await put('a.txt', {}), 'length-required', /missing/);
    await expectProblem(await put('a.txt', { 'content-length': '1e3' }), 'length-required', /«1e3»/);
  });
  test('a file above 100 MB is refused by its Content-Length alone', async () => {
    await expectProblem(await put('a.txt', { 'content-length': '100000001' }), 'too-large', /100000001.*100000000/);
  });
  test.each([
    '/a.txt',
    'a//b.txt',
    'a/../b.txt',
    './a.txt',
    'a\\b.txt',
    'a/=b.txt',
    '%2Bb.txt',
    '@b/c.txt',
    '-b.txt',
    'a%00.txt',
    'a%0A.txt',
    'e%CC%81.txt',
    'x'.repeat(513),
    '',
  ])('the path %j', async (path) => {
    await expectProblem(await put(path), 'bad-path', /./, 'path');
  });
  test('a path with a percent code that is not UTF-8', async () => {
    await expectProblem(await put('a%ff.txt'), 'bad-path', /percent code/, 'path');
    await expectProblem(await put('a%zz.txt'), 'bad-path', /percent code/, 'path');
  });
  test('no path', async () => {
    const response = await api.send('PUT', `/v1/campaigns/${id}/files`, { body: 'x' });
    await expectProblem(response, 'invalid-input', /path is missing/, 'path');
  });

  const form = (headers: Record<string, string>, body: BodyInit = '') =>
    api.send('POST', `/v1/campaigns/${id}/scans`, { body, headers });
  test('a form without Content-Length, too large, of another type, or broken', async () => {
    const type = 'multipart/form-data; boundary=b';
    await expectProblem(await form({ 'content-type': type }), 'length-required', /missing/);
    const large = { 'content-type': type, 'content-length': '8000001' };
    await expectProblem(await form(large), 'too-large', /8000001.*8000000/);
    await expectProblem(await form({ ...json, 'content-length': '2' }, '{}'), 'media-type-refused', /multipart/);
    await expectProblem(
      await form({ 'content-type': type, 'content-length': '2' }, 'xx'),
      'malformed-form',
      /multipart/,
    );
  });
  const sendForm = async (parts: [string, string | File][]) => {
    const data = new FormData();
    for (const [field, value] of parts) data.append(field, value as string);
    const request = new Request('http://x/', { method: 'POST', body: data });
    const bytes = await request.arrayBuffer();
    return form(
      { 'content-type': request.headers.get('content-type') as string, 'content-length': String(bytes.byteLength) },
      bytes,
    );
  };
  test('a form with an unknown field, no file, or more than 50', async () => {
    await expectProblem(await sendForm([['colour', 'red']]), 'invalid-input', /«colour» is not known/, 'colour');
    const files = (n: number) =>
      Array.from({ length: n }, (_, i): [string, File] => ['files[]', new File(['x'], `a/b/${i}.txt`)]);
    await expectProblem(await sendForm(files(51)), 'invalid-input', /51 files.*1 to 50/, 'files[]');
  });

  test('hosts, origins and proxies', async () => {
    const get = (headers: Record<string, string>) => api.send('GET', '/healthz', { headers });
    await expectProblem(await get({ host: 'evil.example' }), 'host-refused', /"evil.example".*localhost:8787/);
    await expectProblem(await get({ origin: 'https://evil.example' }), 'origin-refused', /evil.example/);
    await expectProblem(await get({ 'x-forwarded-for': '1.2.3.4' }), 'proxy-refused', /x-forwarded-for/);
    expect((await get({ origin: `http://${HOST}` })).status).toBe(200);
  });
  test('no answer lets another origin read it', async () => {
    const response = await api.send('GET', '/v1/campaigns');
    expect([...response.headers.keys()].filter((name) => name.startsWith('access-control-'))).toEqual([]);
    expect(response.headers.get('cross-origin-resource-policy')).toBe('same-origin');
  });

  test('a store that fails shows nothing of its inside', async () => {
    const told: string[] = [];
    const observer: Observer = {
      request: () => undefined,
      job: () => undefined,
      trouble: (what) => void told.push(what),
      figures: () => '',
    };
    const broken = await openHarness({ observer });
    broken.ports.database.close();
    const response = await broken.send('GET', '/v1/campaigns');
    const text = await response.clone().text();
    expect(text).not.toMatch(/sql|select|libsql|\.ts/i);
    await expectProblem(response, 'internal-error', /could not be carried out/);
    await expectProblem(await broken.send('GET', '/readyz'), 'not-ready', /database or the blob store/);
    // The operator's log has what the answer keeps back.
    expect(told.length).toBe(2);
  });
});
