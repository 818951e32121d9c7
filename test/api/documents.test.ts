import { afterAll, beforeAll, expect, test } from 'vitest';
import { createApp } from '../../api/app.ts';
import { PROBLEMS } from '../../api/problems.ts';
import { ROW_SHAPES } from '../../api/shapes/rows.ts';
import { RESULT_TABLES, type ResultTable } from '../../schema/wire/result-tables.ts';
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

test('every route documents its query, its path and the shape of a problem', async () => {
  const { body } = await api.get('/v1/openapi.json');
  for (const [path, methods] of Object.entries(body.paths as Record<string, Record<string, Body>>))
    for (const operation of Object.values(methods)) {
      expect(operation.summary, path).toMatch(/\.$/);
      expect(operation.responses.default.content).toHaveProperty(['application/problem+json']);
      const named = [...path.matchAll(/\{(\w+)\}/g)].map((m) => m[1]);
      const inPath = (operation.parameters ?? []).filter((p: Body) => p.in === 'path').map((p: Body) => p.name);
      expect(inPath).toEqual(named);
    }
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
