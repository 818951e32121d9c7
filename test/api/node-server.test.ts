import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { request } from 'node:http';
import { connect } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { type RunningServer, startServer } from '../../api/node.ts';
import { type Body, type Harness, openHarness } from './harness.ts';

let api: Harness;
let server: RunningServer;
let webDir: string;
beforeAll(async () => {
  api = await openHarness();
  webDir = await mkdtemp(join(tmpdir(), 'ratespan-web-'));
  server = await startServer({ ports: api.ports, port: 0, host: '127.0.0.1', webDir });
});
afterAll(async () => {
  await server.close();
  await api.close();
  await rm(webDir, { recursive: true, force: true });
});

/** One request over a real connection, with a Host of one's own. */
function ask(path: string, headers: Record<string, string> = {}) {
  return new Promise<{ status: number; headers: Record<string, Body>; text: string }>((resolve, reject) => {
    request(`${server.url}${path}`, { headers, agent: false }, (response) => {
      let text = '';
      response.on('data', (part) => (text += part));
      response.on('end', () => resolve({ status: response.statusCode as number, headers: response.headers, text }));
    })
      .on('error', reject)
      .end();
  });
}

test('answers under its own port only', async () => {
  expect((await ask('/healthz')).status).toBe(200);
  expect((await ask('/healthz', { host: `localhost:${server.port}` })).status).toBe(200);
  for (const host of [`evil.example:${server.port}`, 'localhost:1', 'localhost']) {
    const { status, headers } = await ask('/healthz', { host });
    expect([status, headers['content-type']]).toEqual([403, 'application/problem+json']);
  }
});

test('refuses an address that other machines can reach', async () => {
  await expect(startServer({ ports: api.ports, port: 0, host: '0.0.0.0' })).rejects.toThrow(/no access token exists/);
});

test('a port that is taken is an error of the caller', async () => {
  const again = startServer({ ports: api.ports, port: server.port, host: '127.0.0.1' });
  await expect(again).rejects.toMatchObject({ code: 'EADDRINUSE' });
});

test('says how to build the page when it is missing, then serves it for every path outside the API', async () => {
  const missing = await ask('/');
  expect(missing.status).toBe(503);
  expect(missing.text).toContain('npm run build:web');

  await mkdir(join(webDir, 'assets'));
  await writeFile(join(webDir, 'index.html'), '<!doctype html><title>page</title>');
  await writeFile(join(webDir, 'assets', 'app-1.js'), 'export {};');
  for (const path of ['/', '/campaigns/c_1', '/campaigns/a.b', '/v2']) {
    const page = await ask(path);
    expect([path, page.status, page.text]).toEqual([path, 200, '<!doctype html><title>page</title>']);
    expect(page.headers['content-security-policy']).toMatch(/^default-src 'none'; script-src 'self'; style-src 'self'/);
    expect(page.headers['cache-control']).toBe('no-cache');
    expect(page.headers['x-content-type-options']).toBe('nosniff');
  }
  const script = await ask('/assets/app-1.js');
  expect(script.headers['content-type']).toMatch(/javascript/);
  expect(script.headers['cache-control']).toMatch(/immutable/);
  expect((await ask('/assets/gone.js')).status).toBe(404);
  expect((await ask('/v1/nothing')).headers['content-type']).toBe('application/problem+json');
  expect((await ask('/..%2f..%2fpackage.json')).text).not.toContain('dependencies');
});

test('a body without a length is refused before it is read, and one above the limit too', async () => {
  const { body } = await api.sendJson('POST', '/v1/campaigns', { name: 'socket' });
  const raw = (lines: string[]) =>
    new Promise<string>((resolve, reject) => {
      const socket = connect(server.port, '127.0.0.1', () => socket.write(`${lines.join('\r\n')}\r\n\r\n`));
      socket.once('data', (data) => {
        resolve(data.toString());
        socket.destroy();
      });
      socket.on('error', reject);
    });
  const head = [`PUT /v1/campaigns/${body.id}/files?path=a/b/c.txt HTTP/1.1`, `Host: localhost:${server.port}`];
  expect(await raw([...head, 'Transfer-Encoding: chunked'])).toMatch(/^HTTP\/1.1 411 /);
  expect(await raw([...head, 'Content-Length: 100000001'])).toMatch(/^HTTP\/1.1 413 /);
});
