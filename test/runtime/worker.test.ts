import { sql } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, test, vi } from 'vitest';
import { type Body, openHarness } from '../api/harness.ts';
import { smallCampaign, TRUE_ENERGY_KJ_PER_MOL } from '../api/small-campaign.ts';
import { compareTables } from './demo-parity.ts';
import { type Runtime, runtimeProblem, startRuntime } from './start-runtime.ts';

const problem = await runtimeProblem();
if (problem) console.warn(`skipped: the serverless runtime does not start on this machine (${problem})`);

describe.skipIf(problem)('the serverless program in the real runtime', () => {
  let runtime: Runtime;
  let id: string;
  const files = smallCampaign([5, 10, 20]);

  const send = (method: string, path: string, body?: BodyInit, headers: Record<string, string> = {}) =>
    fetch(new URL(path, runtime.url), {
      method,
      body,
      headers: { authorization: `Bearer ${runtime.token}`, ...headers },
    });
  const get = async (path: string): Promise<Body> => (await send('GET', path)).json();
  const upload = async (path: string, bytes: Uint8Array): Promise<Body> =>
    (await send('PUT', `/v1/campaigns/${id}/files?path=${encodeURIComponent(path)}`, bytes as BodyInit)).json();
  const settled = () =>
    vi.waitFor(
      async () => {
        const status = await get(`/v1/campaigns/${id}/status`);
        expect(status.settled).toBe(true);
        return status;
      },
      { timeout: 20_000, interval: 100 },
    );

  beforeAll(async () => {
    runtime = await startRuntime();
  }, 20_000);
  afterAll(() => runtime?.close());

  test('is ready', async () => {
    expect(await get('/readyz')).toEqual({ status: 'ready' });
  });

  test('files go in, parameters come out', { timeout: 30_000 }, async () => {
    const made = await send('POST', '/v1/campaigns', '{"name":"serverless"}', { 'content-type': 'application/json' });
    expect(made.status).toBe(201);
    id = ((await made.json()) as Body).id;
    for (const [path, bytes] of files)
      expect(await upload(path, bytes)).toMatchObject({
        file: path,
        outcome: expect.stringMatching(/^(sheet|accepted)$/),
      });
    const status = await settled();
    expect(status.scans.reduced).toBe(3);
    expect(status.samples).toMatchObject([{ sample: 'glass', state: 'fitted' }]);
    const { items } = await get(`/v1/campaigns/${id}/parameters?method=kissinger&quantity=activation_energy`);
    const headline = items.find((r: Body) => r.variant === '' && r.interval === 'monte_carlo');
    // Truth known from the making of the data.
    expect(Math.abs(headline.value / TRUE_ENERGY_KJ_PER_MOL - 1)).toBeLessThan(0.02);
  });

  test('originals come back from the bucket unchanged, and the same bytes are known', async () => {
    const { items } = await get(`/v1/campaigns/${id}/scans`);
    const { samples } = await get(`/v1/campaigns/${id}/status`);
    const { scans } = await get(`/v1/samples/${samples[0].id}`);
    expect(scans.map((s: Body) => s.file).sort()).toEqual(items.map((r: Body) => r.file).sort());
    for (const { id: scanId, file } of scans) {
      const original = new Uint8Array(await (await send('GET', `/v1/scans/${scanId}/original`)).arrayBuffer());
      expect(original).toEqual(files.get(file));
      expect((await upload(file, original)).outcome).toBe('known');
    }
  });

  test('the sweep finds a job whose message was lost', { timeout: 20_000 }, async () => {
    await settled();
    // As if the row had been written and the message never sent.
    await runtime.database.write((db) =>
      db.run(sql`update jobs set state = 'queued', attempts = 0, finished_at = null, next_try_at = 0, woken = 0
        where step = 'plan-campaign' and campaign_id = ${id}`),
    );
    // Control: nothing else wakes it.
    await new Promise((resolve) => setTimeout(resolve, 300));
    expect((await get(`/v1/campaigns/${id}/status`)).settled).toBe(false);
    const worker = await runtime.miniflare.getWorker();
    expect((await worker.scheduled({ cron: '*/5 * * * *' })).outcome).toBe('ok');
    await settled();
  });

  test('the tables are those of Node, to the last digits', { timeout: 60_000 }, async () => {
    const node = await openHarness();
    try {
      const { body } = await node.sendJson('POST', '/v1/campaigns', { name: 'on Node' });
      for (const [path, bytes] of files) await node.upload(body.id, path, bytes);
      await node.drain();
      for (const table of ['parameters', 'scans', 'conversion']) {
        const there = await (await send('GET', `/v1/campaigns/${id}/${table}?format=csv`)).text();
        const here = await (await node.send('GET', `/v1/campaigns/${body.id}/${table}?format=csv`)).text();
        expect(there.split('\n').length).toBeGreaterThan(3);
        const { otherText, worstRelative } = compareTables(here, there);
        expect([otherText, worstRelative < 1e-13]).toEqual([0, true]);
      }
    } finally {
      await node.close();
    }
  });

  test('a message of a job that is not there, and one doubled, do no harm', async () => {
    const worker = await runtime.miniflare.getWorker();
    const { items } = await get('/v1/jobs?state=done&limit=1');
    const result = await worker.queue('ratespan-jobs', [
      message({ jobId: 'j_nobody' }, 1),
      message({ jobId: items[0].id }, 2),
    ]);
    expect(result.outcome).toBe('ok');
    expect(result.explicitAcks).toEqual(['m1', 'm2']);
  });

  test('a message that cannot be read goes to the lost ones and is let go there', async () => {
    const worker = await runtime.miniflare.getWorker();
    for (const [n, body] of [null, 'text', {}, { jobId: 7 }].entries()) {
      const result = await worker.queue('ratespan-jobs', [message(body, n)]);
      expect(result.retryMessages).toEqual([{ msgId: `m${n}` }]);
      expect((await worker.queue('ratespan-jobs-lost', [message(body, n)])).explicitAcks).toEqual([`m${n}`]);
    }
  });

  test('a step that ends its isolate at every delivery fails its job with the reason, and the rest goes on', {
    timeout: 30_000,
  }, async () => {
    await settled();
    // As an isolate that dies before the row is written: neither the end of the job nor its failure gets through.
    runtime.bridge.cut = /set state = 'done', finished_at|set leased_by = null, leased_until = null, last_error/;
    await send('POST', `/v1/campaigns/${id}/refit`);
    const job = await vi.waitFor(
      async () => {
        const { items } = await get('/v1/jobs?state=failed');
        const fit = items.find((found: Body) => found.step === 'fit-sample');
        expect(fit).toBeDefined();
        return fit;
      },
      { timeout: 20_000, interval: 200 },
    );
    runtime.bridge.cut = undefined;
    expect(job).toMatchObject({ step: 'fit-sample', attempts: 3 });
    expect(job.last_error).toMatch(/gave it up after 3 attempts that ended without a word/);
    const status = await get(`/v1/campaigns/${id}/status`);
    expect(status.samples[0]).toMatchObject({ state: 'failed', reason: expect.stringContaining('gave it up') });
    // Tried again by hand it ends well.
    expect((await send('POST', `/v1/jobs/${job.id}/retry`)).status).toBe(202);
    expect((await settled()).samples[0].state).toBe('fitted');
  });

  test('a database that is away for a while delays the work and loses nothing', { timeout: 30_000 }, async () => {
    await settled();
    runtime.bridge.cut = /./;
    const refused = await send('POST', `/v1/campaigns/${id}/refit`);
    expect(refused.status).toBe(503);
    expect(refused.headers.get('retry-after')).not.toBeNull();
    runtime.bridge.cut = undefined;
    expect((await send('POST', `/v1/campaigns/${id}/refit`)).status).toBe(202);
    expect((await settled()).samples[0].state).toBe('fitted');
  });

  test('the page is served for every path outside the API, with the headers of the program', async () => {
    for (const path of ['/', '/campaigns/c_1']) {
      const page = await send('GET', path);
      expect([page.status, await page.text()]).toEqual([200, '<!doctype html><title>page</title>']);
      expect(page.headers.get('content-security-policy')).toMatch(/^default-src 'none'; script-src 'self'/);
      expect(page.headers.get('x-frame-options')).toBe('DENY');
    }
    expect((await send('GET', '/v1/nothing')).headers.get('content-type')).toBe('application/problem+json');
  });

  test('without a token there are pages and documents only', async () => {
    for (const path of ['/v1/campaigns', '/v1/jobs', '/metrics']) {
      const response = await fetch(new URL(path, runtime.url));
      expect([path, response.status]).toEqual([path, 401]);
    }
    for (const path of ['/', '/v1/openapi.json', '/v1/reference', '/healthz'])
      expect((await fetch(new URL(path, runtime.url))).status).toBe(200);
  });
});

const message = (body: unknown, n: number) => ({ id: `m${n}`, timestamp: new Date(), attempts: 1, body });
