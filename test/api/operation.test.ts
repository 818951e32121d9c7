import { createHash } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
import { createObserver } from '../../jobs/adapters/observer.ts';
import type { Ports } from '../../jobs/ports/index.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { claimReply, createCampaign, createToken, LOCAL_LAB } from '../../jobs/store/index.ts';
import { drain, openTestPorts, send, type TestPorts } from '../runner/test-ports.ts';
import { type Body, HOST } from './harness.ts';

let ports: TestPorts;
const lines: string[] = [];
const observer = createObserver((line) => lines.push(line));
let app: ReturnType<typeof createApp>;
beforeAll(async () => {
  ports = await openTestPorts();
  app = createApp(ports, { access: { port: () => 8787 }, observer });
});
afterAll(() => ports.close());

const ask = (method: string, path: string, body?: string, headers: Record<string, string> = {}, on = app) =>
  on.request(`http://${HOST}${path}`, {
    method,
    body,
    headers: { host: HOST, ...(body && { 'content-type': 'application/json' }), ...headers },
  });

describe('Idempotency-Key', () => {
  const make = (name: string, key: string) =>
    ask('POST', '/v1/campaigns', JSON.stringify({ name }), { 'idempotency-key': key });

  test('the same request again gets the first answer and does nothing', async () => {
    const first = await make('once', 'k1');
    const again = await make('once', 'k1');
    expect([first.status, again.status]).toEqual([201, 201]);
    expect(await again.text()).toBe(await first.text());
    expect(again.headers.get('location')).toBe(first.headers.get('location'));
    expect(again.headers.get('idempotency-replayed')).toBe('true');
    // The control: without a key the second is refused.
    expect((await ask('POST', '/v1/campaigns', '{"name":"once"}')).status).toBe(409);
  });

  test('another request under the key is refused, and a key counts for a day', async () => {
    const other = await make('twice', 'k1');
    expect([other.status, ((await other.json()) as Body).type]).toEqual([422, '/v1/reference#key-reused']);
    ports.clock.advance(86_400_001);
    expect((await make('twice', 'k1')).status).toBe(201);
  });

  test('two at once are one: the second gets the first answer, or is asked to come again', async () => {
    const both = await Promise.all([make('racing', 'k2'), make('racing', 'k2')]);
    for (const { status, headers } of both)
      expect([201, 409]).toContain(status === 409 && !headers.get('retry-after') ? 0 : status);
    expect(both.filter((r) => r.status === 201 && !r.headers.get('idempotency-replayed'))).toHaveLength(1);
    expect((await make('racing', 'k2')).status).toBe(201);
  });

  test('a request whose process died before the answer can be sent again after a minute', async () => {
    const body = '{"name":"after the crash"}';
    const hash = createHash('sha256').update(`POST /v1/campaigns ${body}`).digest('hex');
    expect((await claimReply(ports, LOCAL_LAB, 'k3', hash)).state).toBe('ours');
    const send = () => ask('POST', '/v1/campaigns', body, { 'idempotency-key': 'k3' });
    expect((await send()).status).toBe(409);
    ports.clock.advance(60_001);
    expect((await send()).status).toBe(201);
  });

  test('a key with other characters is refused', async () => {
    expect((await make('x', 'a'.repeat(201))).status).toBe(422);
  });
});

test('figures are OpenMetrics without a name of anything that belongs to a lab', async () => {
  const { id } = await createCampaign(ports, 'secret films');
  await send(ports, id, 'alloy-seven/oven/1.txt', 'rate 1');
  const runner = createRunner(ports, { concurrency: 1, owner: 'test', observer });
  let over = false;
  const done = runner.drain(id).finally(() => {
    over = true;
  });
  while (!over) {
    await new Promise((resolve) => setImmediate(resolve));
    ports.clock.advance(100);
  }
  await done;
  await ask('GET', `/v1/campaigns/${id}/status`);
  const response = await ask('GET', '/metrics');
  expect(response.headers.get('content-type')).toBe('application/openmetrics-text; version=1.0.0; charset=utf-8');
  const text = await response.text();
  // The grammar of the OpenMetrics text format 1.0: one family after the other, an end mark, no blank line.
  expect(text.endsWith('# EOF\n')).toBe(true);
  for (const line of text.trimEnd().split('\n'))
    expect(line).toMatch(
      /^(# (TYPE|UNIT|HELP) ratespan_\w+ .+|# EOF|ratespan_\w+(\{[a-z]+="[^"\n]*"(,[a-z]+="[^"\n]*")*\})? -?[\d.e+-]+)$/,
    );
  expect(text).toContain('ratespan_jobs{state="done"}');
  expect(text).toMatch(/ratespan_job_seconds_count\{step="read-scan",end="done"\} 1/);
  expect(text).toMatch(/route="\/v1\/campaigns\/:id\/status",status="200"/);
  for (const name of [id, 'secret films', 'alloy-seven', 'lab']) expect(text).not.toContain(name);
});

test('log lines are JSON, carry the ids of request and job, and no secret', async () => {
  lines.length = 0;
  const { token } = await createToken(ports, { lab: 'ours', role: 'keeper', days: 1 });
  const closed = createApp(ports, { access: {}, observer });
  const answer = await ask(
    'GET',
    '/v1/campaigns?limit=5',
    undefined,
    { authorization: `Bearer ${token}`, cookie: 'c=1' },
    closed,
  );
  await ask('GET', '/v1/campaigns', undefined, { authorization: 'Bearer wrong-secret' }, closed);
  const logged = lines.map((line) => JSON.parse(line));
  expect(logged[0]).toMatchObject({
    event: 'request',
    request_id: answer.headers.get('x-request-id'),
    route: '/v1/campaigns',
    status: 200,
    token_id: token.split('.')[0],
  });
  expect(logged[1].status).toBe(401);
  for (const secret of [token.split('.')[1], 'wrong-secret', 'c=1']) expect(lines.join('\n')).not.toContain(secret);
});

/** Ports whose database throws `error` on every write. */
const failing = (error: Error): Ports => ({
  ...ports,
  database: { read: ports.database.read, write: () => Promise.reject(error), close: () => {} },
});

test.each([
  ['SQLITE_BUSY', 503],
  ['SQLITE_FULL', 503],
  ['ENOSPC', 503],
  ['SQLITE_CORRUPT', 500],
])('a store that says %s answers %i, and says when to come again where that helps', async (code, status) => {
  lines.length = 0;
  const broken = createApp(failing(Object.assign(new Error('of the store'), { code })), {
    access: { port: () => 8787 },
    observer,
  });
  const response = await ask('POST', '/v1/campaigns', '{"name":"later"}', {}, broken);
  expect(response.status).toBe(status);
  expect(response.headers.get('retry-after')).toBe(status === 503 ? '5' : null);
  expect(await response.text()).not.toContain('of the store');
  expect(lines.join('\n')).toContain('of the store');
});

test('readyz says no when the blobs are out of reach', async () => {
  const broken = { ...ports, blobs: { ...ports.blobs, has: () => Promise.reject(new Error('unmounted')) } };
  const response = await ask('GET', '/readyz', undefined, {}, createApp(broken, { access: { port: () => 8787 } }));
  expect(response.status).toBe(503);
  expect((await ask('GET', '/readyz')).status).toBe(200);
  await drain(ports);
});
