import { afterAll, beforeAll, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
import { EXAMPLES } from '../../api/examples.ts';
import { PROBLEMS } from '../../api/problems.ts';
import { ROW_SHAPES } from '../../api/shapes/rows.ts';
import { RESULT_TABLES, type ResultTable } from '../../schema/wire/result-tables.ts';
import { createShapeCheck } from './document-shapes.ts';
import { operationsOf } from './draw-request.ts';
import { type Body, type Harness, openHarness } from './harness.ts';

let api: Harness;
beforeAll(async () => {
  api = await openHarness();
});
afterAll(() => api.close());

test('the document lists exactly the routes that exist', async () => {
  const { body } = await api.get('/v1/openapi.json');
  expect(body.openapi).toBe('3.1.0');
  const listed = Object.entries(body.paths as Record<string, object>)
    .flatMap(([path, methods]) => Object.keys(methods).map((m) => `${m.toUpperCase()} ${path}`))
    .sort();
  const app = createApp(api.ports, { access: {} });
  const existing = app.routes
    .filter(({ method }) => method !== 'ALL')
    .map(({ method, path }) => `${method} ${path.replaceAll(/:(\w+)/g, '{$1}')}`);
  expect(listed).toEqual([...new Set(existing)].sort());
  expect(listed.length).toBeGreaterThan(25);
});

test('every route documents its name, query, path, and each problem in one shape with an example', async () => {
  const { body } = await api.get('/v1/openapi.json');
  const breach = createShapeCheck(body);
  const names: string[] = [];
  for (const { method, route, operation } of operationsOf(body)) {
    const where = `${method} ${route}`;
    names.push(operation.operationId);
    expect(operation.summary, where).toMatch(/\.$/);
    const named = [...route.matchAll(/\{(\w+)\}/g)].map((m) => m[1]);
    const inPath = operation.parameters.filter((p: Body) => p.in === 'path').map((p: Body) => p.name);
    expect(inPath).toEqual(named);
    const refusals = Object.entries<Body>(operation.responses).filter(([status]) => Number(status) >= 400);
    expect(refusals.length, where).toBeGreaterThan(2);
    for (const [status, { content }] of refusals) {
      const { schema, examples } = content['application/problem+json'];
      expect(schema).toEqual({ $ref: '#/components/schemas/Problem' });
      for (const [code, { value }] of Object.entries<Body>(examples)) {
        expect(breach(schema, value), `${where} ${code}`).toBeUndefined();
        expect([value.type, String(value.status)]).toEqual([`/v1/reference#${code}`, status]);
      }
    }
  }
  for (const name of names) expect(name).toMatch(/^[a-z]+[A-Za-z]*$/);
  expect(new Set(names).size).toBe(names.length);
});

test('every JSON body and answer has an example in its shape, and no example lacks its route', async () => {
  const { body } = await api.get('/v1/openapi.json');
  const breach = createShapeCheck(body);
  const operations = operationsOf(body);
  for (const { method, route, operation } of operations) {
    const bodies = [
      operation.requestBody?.content['application/json'],
      ...Object.entries<Body>(operation.responses)
        .filter(([status]) => Number(status) < 400)
        .map(([, answer]) => answer.content?.['application/json']),
    ];
    for (const media of bodies.filter((m) => m !== undefined)) {
      expect(media.example, `${method} ${route}`).toBeDefined();
      if (route !== '/v1/openapi.json')
        expect(breach(media.schema, media.example), `${method} ${route}`).toBeUndefined();
    }
  }
  expect(Object.keys(EXAMPLES).sort()).toEqual(operations.map(({ method, route }) => `${method} ${route}`).sort());
});

test.each(Object.keys(RESULT_TABLES) as ResultTable[])('rows of %s have the columns of the file, in order', (table) => {
  expect(Object.keys(ROW_SHAPES[table].shape)).toEqual(RESULT_TABLES[table]);
});

test('the reference is one page without script or network that names every route and problem', async () => {
  const response = await api.send('GET', '/v1/reference');
  expect(response.headers.get('content-type')).toMatch(/^text\/html/);
  const policy = response.headers.get('content-security-policy') ?? '';
  expect(policy).toMatch(/^default-src 'none'; style-src 'sha256-[A-Za-z0-9+/]{43}='; /);
  const html = await response.text();
  // The hash in the policy is that of the style on the page (CSP level 3, 8.3), computed here by another library.
  const { createHash } = await import('node:crypto');
  const style = /<style>([\s\S]*?)<\/style>/.exec(html)?.[1] ?? '';
  expect(policy).toContain(createHash('sha256').update(style).digest('base64'));
  expect(html).not.toMatch(/<script|<link|<img|https?:\/\/| style=/);
  const { body } = await api.get('/v1/openapi.json');
  for (const path of Object.keys(body.paths)) expect(html).toContain(`<code>${path}</code>`);
  for (const code of Object.keys(PROBLEMS)) expect(html).toContain(`<tr id="${code}">`);
});

test('alive and ready', async () => {
  expect(await api.get('/healthz')).toEqual({ status: 200, body: { status: 'alive' } });
  expect(await api.get('/readyz')).toEqual({ status: 200, body: { status: 'ready' } });
});
