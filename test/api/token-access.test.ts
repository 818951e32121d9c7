import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
import { createCampaign, createToken, revokeToken } from '../../jobs/store/index.ts';
import { tokens as tokenTable } from '../../schema/tables/index.ts';
import { TOKEN_ROLES, type TokenRole } from '../../schema/wire/states.ts';
import { drain, openTestPorts, send, type TestPorts } from '../runner/test-ports.ts';
import type { Body } from './harness.ts';

/** One app that asks for tokens, over stores that hold a campaign of lab `ours`. Its clock is moved by hand. */
let ports: TestPorts;
let app: ReturnType<typeof createApp>;
const tokens: Record<string, string> = {};
const ids: Record<string, string> = {};
const MINUTE_MS = 61_000;

beforeAll(async () => {
  ports = await openTestPorts();
  app = createApp(ports, { access: { addressOf: (c) => c.req.header('x-test-address') ?? '192.0.2.1' } });
  const make = async (name: string, lab: string, role: TokenRole, days = 9) => {
    const made = await createToken(ports, { lab, role, days });
    tokens[name] = made.token;
    return made.id;
  };
  for (const role of TOKEN_ROLES) await make(role, 'ours', role);
  await make('other lab', 'theirs', 'keeper');
  await revokeToken(ports, await make('revoked', 'ours', 'keeper'));
  tokens['wrong'] = `${tokens['keeper'].slice(0, -1)}${tokens['keeper'].endsWith('A') ? 'E' : 'A'}`;
  ids['campaign'] = (await createCampaign(ports, 'films', 'ours')).id;
  for (const rate of [1, 2, 3]) await send(ports, ids['campaign'], `A/oven/${rate}.txt`, `rate ${rate}`);
  await drain(ports);
  const get = async (path: string) => (await (await ask('GET', path, 'keeper')).json()) as Body;
  ids['sample'] = (await get(`/v1/campaigns/films/status`)).samples[0].id;
  ids['instrument'] = (await get('/v1/campaigns/films')).instruments[0].id;
  ids['scan'] = (await get(`/v1/samples/${ids['sample']}`)).scans[0].id;
  ids['job'] = (await get('/v1/jobs')).items[0].id;
}, 60_000);
afterAll(() => ports.close());

function ask(method: string, path: string, who?: string, body?: string, headers: Record<string, string> = {}) {
  return app.request(`http://ratespan.example${path}`, {
    method,
    body,
    headers: {
      ...(who !== undefined && { authorization: `Bearer ${tokens[who] ?? who}` }),
      ...(body !== undefined && { 'content-type': 'application/json' }),
      ...headers,
    },
  });
}

/** What a request needs beside its path to be carried out for a keeper. */
const BODIES: Record<string, string> = {
  'post /v1/campaigns': '{"name":"another"}',
  'patch /v1/campaigns/{id}': '{"name":"films"}',
};
const QUERIES: Record<string, string> = {
  'put /v1/campaigns/{id}/files': '?path=a/b/c.txt',
  'delete /v1/campaigns/{id}': '?confirm=films',
  'get /v1/samples/{id}/curves': '?kind=kissinger',
  'get /v1/instruments/{id}/curves': '?kind=calibration',
};

interface Row {
  method: string;
  route: string;
  path: string;
  body?: string;
  needed: TokenRole;
}

/** The least role of every route, written out here, apart from the program's own table. */
const LEAST_ROLES: Record<TokenRole | 'none', string> = {
  none: 'get /healthz, get /readyz, get /v1/openapi.json, get /v1/reference',
  reader: `get /v1/campaigns, get /v1/campaigns/{id}, get /v1/campaigns/{id}/advice, get /v1/campaigns/{id}/conversion,
    get /v1/campaigns/{id}/coverage, get /v1/campaigns/{id}/flags, get /v1/campaigns/{id}/forecasts, get /v1/campaigns/{id}/gaps,
    get /v1/campaigns/{id}/instruments, get /v1/campaigns/{id}/overview, get /v1/campaigns/{id}/parameters, get /v1/campaigns/{id}/report,
    get /v1/campaigns/{id}/results.zip, get /v1/campaigns/{id}/scans, get /v1/campaigns/{id}/status, get /v1/campaigns/{id}/stream,
    get /v1/campaigns/{id}/verdicts, get /v1/instruments/{id}, get /v1/instruments/{id}/curves, get /v1/jobs, get /v1/samples/{id},
    get /v1/samples/{id}/curves, get /v1/scans/{id}, get /v1/scans/{id}/history, get /v1/scans/{id}/original,
    post /v1/samples/{id}/forecasts`,
  sender: `patch /v1/campaigns/{id}, patch /v1/scans/{id}, post /v1/campaigns, post /v1/campaigns/{id}/refit,
    post /v1/campaigns/{id}/scans, post /v1/jobs/{id}/retry, put /v1/campaigns/{id}/files, put /v1/campaigns/{id}/goals`,
  keeper: 'get /metrics, delete /v1/campaigns/{id}',
};
const routesOf = (role: TokenRole | 'none') => LEAST_ROLES[role].split(',').map((route) => route.trim());

function matrix(): Row[] {
  const rows = TOKEN_ROLES.flatMap((needed) =>
    routesOf(needed).map((key): Row => {
      const [method, route] = key.split(' ');
      const kind = /^\/v1\/(campaign|sample|scan|job|instrument)s\//.exec(route)?.[1] ?? 'campaign';
      return {
        method: method.toUpperCase(),
        route,
        path: route.replace('{id}', ids[kind]) + (QUERIES[key] ?? ''),
        body: method === 'get' || method === 'delete' ? undefined : (BODIES[key] ?? '{}'),
        needed,
      };
    }),
  );
  // Deleting comes last: the other rows need what it deletes.
  return rows.sort((a, b) => Number(a.method === 'DELETE') - Number(b.method === 'DELETE'));
}

test('every route that the program takes is in the table and in the document', async () => {
  const table = (Object.keys(LEAST_ROLES) as (TokenRole | 'none')[]).flatMap(routesOf).sort();
  // Middleware stands among the routes as method ALL.
  const taken = app.routes
    .filter(({ method }) => method !== 'ALL')
    .map(({ method, path }) => `${method.toLowerCase()} ${path.replace(/:(\w+)/g, '{$1}')}`);
  expect(table).toEqual([...new Set(taken)].sort());
  const { paths } = (await (await ask('GET', '/v1/openapi.json')).json()) as Body;
  const written = Object.entries<Body>(paths).flatMap(([path, methods]) =>
    Object.keys(methods)
      .filter((method) => ['get', 'put', 'post', 'patch', 'delete'].includes(method))
      .map((method) => `${method} ${path}`),
  );
  expect(table).toEqual(written.sort());
});

test('what is open answers without a token', async () => {
  for (const route of routesOf('none')) expect((await ask('GET', route.split(' ')[1])).status, route).toBe(200);
});

/** A role that is not enough must not reach the route; one that is enough must, whatever the route then makes of the body. */
test('every route by every kind of caller', { timeout: 60_000 }, async () => {
  const rows = matrix();
  const wrong: string[] = [];
  const expectStatus = async (row: Row, who: string | undefined, allowed: (status: number) => boolean) => {
    // Pace of the test, not of a caller: a minute apart, so that no limit plays a part.
    ports.clock.advance(MINUTE_MS);
    const response = await ask(row.method, row.path, who, row.body);
    await response.body?.cancel();
    if (!allowed(response.status)) wrong.push(`${row.method} ${row.route} by ${who ?? 'nobody'}: ${response.status}`);
    if (response.status >= 500) wrong.push(`${row.method} ${row.route} by ${who}: ${response.status}`);
  };
  for (const row of rows.filter((r) => r.method !== 'DELETE')) {
    for (const who of [undefined, 'wrong', 'revoked', 'nonsense']) await expectStatus(row, who, (s) => s === 401);
    for (const role of TOKEN_ROLES) {
      const enough = TOKEN_ROLES.indexOf(role) >= TOKEN_ROLES.indexOf(row.needed);
      await expectStatus(row, role, (s) => (enough ? s !== 401 && s !== 403 : s === 403));
    }
    // Of another lab's things nothing is there. Collections answer with the caller's own, which is checked below.
    if (row.path !== row.route) await expectStatus(row, 'other lab', (s) => s === 404 || s === 422);
  }
  for (const row of rows.filter((r) => r.method === 'DELETE')) {
    for (const who of [undefined, 'wrong', 'revoked']) await expectStatus(row, who, (s) => s === 401);
    for (const role of ['reader', 'sender']) await expectStatus(row, role, (s) => s === 403);
    await expectStatus(row, 'other lab', (s) => s === 404);
  }
  expect(wrong).toEqual([]);
});

describe('labs', () => {
  test('see nothing of each other: no id, no name, no byte, and their names do not collide', async () => {
    ports.clock.advance(MINUTE_MS);
    for (const path of ['/v1/campaigns', '/v1/jobs', '/v1/jobs?state=done']) {
      const text = await (await ask('GET', path, 'other lab')).text();
      for (const id of Object.values(ids)) expect(text).not.toContain(id);
      expect(JSON.parse(text).items.filter((c: Body) => c.name === 'films')).toEqual([]);
    }
    expect((await ask('GET', '/v1/campaigns/films', 'other lab')).status).toBe(404);
    expect((await ask('GET', `/v1/jobs?campaign=${ids['campaign']}`, 'other lab')).status).toBe(404);
    expect((await ask('POST', '/v1/campaigns', 'other lab', '{"name":"films"}')).status).toBe(201);
    expect((await ask('GET', '/v1/campaigns/films', 'reader')).status).toBe(200);
  });
});

describe('tokens', () => {
  test('end with their days', async () => {
    expect((await ask('GET', '/v1/campaigns', 'reader')).status).toBe(200);
    const { token } = await createToken(ports, { lab: 'ours', role: 'reader', days: 1 });
    expect((await ask('GET', '/v1/campaigns', token)).status).toBe(200);
    ports.clock.advance(86_400_000);
    expect((await ask('GET', '/v1/campaigns', token)).status).toBe(401);
  });

  test('are stored hashed, and an answer never repeats what was sent', async () => {
    const stored = JSON.stringify(await ports.database.read.select().from(tokenTable));
    for (const token of Object.values(tokens)) expect(stored).not.toContain(token.split('.')[1]);
    const refused = await (await ask('GET', '/v1/campaigns', 'secret-with-a-typing-error')).text();
    expect(refused).not.toContain('secret-with');
    expect(JSON.parse(refused).type).toBe('/v1/reference#token-refused');
  });

  test('are not taken from a query, a cookie or another scheme', async () => {
    ports.clock.advance(MINUTE_MS);
    const headers: Record<string, string>[] = [
      { cookie: `token=${tokens['keeper']}` },
      { authorization: `Basic ${tokens['keeper']}` },
      { authorization: `Bearer ${tokens['keeper']} more` },
      { authorization: 'Bearer' },
    ];
    for (const h of headers) expect((await ask('GET', '/v1/campaigns', undefined, undefined, h)).status).toBe(401);
    expect((await ask('GET', `/v1/campaigns?token=${tokens['keeper']}`)).status).toBe(401);
    const answer = await ask('GET', '/v1/campaigns');
    expect(answer.headers.get('www-authenticate')).toBe('Bearer realm="ratespan"');
    expect(answer.headers.get('access-control-allow-origin')).toBeNull();
  });
});

describe('limits', () => {
  test('20 failed log-ins a minute an address, then even a right token waits; others go on', async () => {
    ports.clock.advance(MINUTE_MS);
    const from = { 'x-test-address': '198.51.100.7' };
    const status = async (who: string, headers = from) =>
      (await ask('GET', '/v1/campaigns', who, undefined, headers)).status;
    for (let i = 0; i < 20; i++) expect(await status('wrong')).toBe(401);
    expect(await status('keeper')).toBe(429);
    expect(await status('keeper', { 'x-test-address': '198.51.100.8' })).toBe(200);
    const held = await ask('GET', '/v1/campaigns', 'keeper', undefined, from);
    expect(Number(held.headers.get('retry-after'))).toBeGreaterThan(50);
    ports.clock.advance(60_000);
    expect(await status('keeper')).toBe(200);
  });

  test('600 requests a minute a token', async () => {
    ports.clock.advance(MINUTE_MS);
    for (let i = 0; i < 600; i++) expect((await ask('GET', '/v1/campaigns?limit=1', 'reader')).status).toBe(200);
    expect((await ask('GET', '/v1/campaigns', 'reader')).status).toBe(429);
    expect((await ask('GET', '/v1/campaigns', 'sender')).status).toBe(200);
    ports.clock.advance(60_000);
    expect((await ask('GET', '/v1/campaigns', 'reader')).status).toBe(200);
  });
});
