import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { type AppOptions, createApp } from '../../api/app.ts';
import { closePorts, openNodePorts } from '../../jobs/adapters/node-ports.ts';
import type { Ports } from '../../jobs/ports/index.ts';
import { createRunner } from '../../jobs/runner/index.ts';

export const HOST = 'localhost:8787';

// biome-ignore lint/suspicious/noExplicitAny: what a body holds is what the tests check
export type Body = any;

export interface Harness {
  ports: Ports;
  /** Sends a request as a client on this machine would; `headers` add to or replace its own. */
  send(
    method: string,
    path: string,
    options?: { body?: BodyInit; headers?: Record<string, string> },
  ): Promise<Response>;
  /** JSON in, parsed JSON out. */
  sendJson(method: string, path: string, body: unknown): Promise<{ status: number; body: Body }>;
  get(path: string): Promise<{ status: number; body: Body }>;
  upload(campaign: string, path: string, bytes: Uint8Array): Promise<{ status: number; body: Body }>;
  drain(): Promise<void>;
  close(): Promise<void>;
}

/** The real app over real ports in a folder of its own. */
export async function openHarness(options: Partial<AppOptions> = {}): Promise<Harness> {
  const dataDir = await mkdtemp(join(tmpdir(), 'ratespan-api-'));
  const ports = await openNodePorts({ dataDir, workers: 0 });
  const app = createApp(ports, { access: { port: () => 8787 }, ...options });
  const send: Harness['send'] = async (method, path, { body, headers } = {}) =>
    app.request(`http://${HOST}${path}`, { method, body, headers: { host: HOST, ...headers } });
  const parsed = async (response: Response) => {
    const text = await response.text();
    return { status: response.status, body: text === '' ? null : JSON.parse(text) };
  };
  return {
    ports,
    send,
    sendJson: async (method, path, body) =>
      parsed(await send(method, path, { body: JSON.stringify(body), headers: { 'content-type': 'application/json' } })),
    get: async (path) => parsed(await send('GET', path)),
    upload: async (campaign, path, bytes) =>
      parsed(
        await send('PUT', `/v1/campaigns/${campaign}/files?path=${encodeURIComponent(path)}`, {
          body: bytes as BodyInit,
          headers: { 'content-length': String(bytes.length) },
        }),
      ),
    drain: () => createRunner(ports, { concurrency: 1, owner: 'test' }).drain(),
    close: async () => {
      await closePorts(ports);
      await rm(dataDir, { recursive: true, force: true });
    },
  };
}
