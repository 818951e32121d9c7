import { afterAll, beforeAll, expect, test } from 'vitest';
import { ApiProblem, Client } from '../../api/client.ts';
import { OPERATIONS } from '../../api/client-types.ts';
import { type RunningServer, startServer } from '../../api/node.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { wantedClientTypes, writtenClientTypes } from '../docs/write-client-types.ts';
import { type Harness, openHarness } from './harness.ts';
import { smallCampaign } from './small-campaign.ts';

let harness: Harness;
let server: RunningServer;
let client: Client;
beforeAll(async () => {
  harness = await openHarness({ stream: { pollMs: 20, lifeMs: 60_000 } });
  server = await startServer({ ports: harness.ports, port: 0, host: '127.0.0.1' });
  client = new Client(server.url);
});
afterAll(async () => {
  await server.close();
  await harness.close();
});

test('the types are those of the document as it is (npm run client-types writes them)', async () => {
  expect(writtenClientTypes()).toBe(await wantedClientTypes());
});

test('a campaign from its making to its numbers, typed, over a real connection', { timeout: 60_000 }, async () => {
  const made = await client.call('createCampaign', { body: { name: 'films' } });
  for (const [path, bytes] of smallCampaign()) {
    const { outcome } = await client.call('putFile', { id: 'films', query: { path }, body: new Uint8Array(bytes) });
    expect(['accepted', 'sheet']).toContain(outcome);
  }
  const seen: boolean[] = [];
  const [status] = await Promise.all([
    client.whenSettled('films', { onStatus: (s) => seen.push(s.settled) }),
    harness.drain(),
  ]);
  expect(status.scans.reduced).toBe(5);
  // The stream told of the way there, and of the end once.
  expect(seen.filter((settled) => settled)).toEqual([true]);
  expect(seen.length).toBeGreaterThan(1);
  expect((await client.call('getCampaign', { id: made.id })).name).toBe('films');

  const energies: number[] = [];
  const query = { quantity: 'activation_energy', method: 'kissinger' };
  for await (const row of client.items('listParameters', { id: 'films', query })) energies.push(row.value);
  // True by construction: 200 kJ/mol.
  expect(Math.abs(energies[0] / 200 - 1)).toBeLessThan(0.02);
  const rows = [];
  for await (const row of client.items('listConversion', { id: 'films' })) rows.push(row);
  const csv = await client.csv('listConversion', 'films');
  expect(csv.split('\n')[0]).toBe(RESULT_TABLES.conversion.join(','));
  expect(csv.trim().split('\n')).toHaveLength(rows.length + 1);

  const zip = await client.call('getResults', { id: 'films' });
  expect([...new Uint8Array(await zip.arrayBuffer())].slice(0, 2)).toEqual([0x50, 0x4b]);
  expect(await client.call('deleteCampaign', { id: 'films', query: { confirm: 'films' } })).toBeUndefined();
});

test('a refusal is an ApiProblem with its code and what to do', async () => {
  const refused = await client.call('getSample', { id: 'nope' }).catch((error: unknown) => error);
  expect(refused).toBeInstanceOf(ApiProblem);
  expect(refused).toMatchObject({ status: 404, code: 'not-found', problem: { action: expect.stringMatching(/\w/) } });
});

test('a server that says when to come back is asked again, and given up after the tries', async () => {
  const answers = [429, 503, 200];
  const asked: string[] = [];
  const send = async (url: string, init: RequestInit) => {
    asked.push(`${init.method} ${url} ${new Headers(init.headers).get('authorization')}`);
    const status = answers.shift() as number;
    return Response.json({ items: [], next: null }, { status, headers: { 'retry-after': '0.001' } });
  };
  const waiting = new Client('http://x/', { token: 't', fetch: send });
  expect(await waiting.call('listCampaigns', {})).toEqual({ items: [], next: null });
  expect(asked).toEqual(Array(3).fill('GET http://x/v1/campaigns Bearer t'));
  answers.push(429, 429);
  await expect(
    new Client('http://x', { fetch: send, tries: 1 }).call('listCampaigns', { query: { limit: 1 } }),
  ).rejects.toThrow(ApiProblem);
});

test('an abort ends the wait for the campaign', async () => {
  const { id } = await client.call('createCampaign', { body: { name: 'never ready' } });
  await client.call('putFile', { id, query: { path: 'a/b/c.txt' }, body: 'x' });
  const stop = new AbortController();
  const waiting = client.whenSettled(id, { signal: stop.signal, onStatus: () => stop.abort() });
  await expect(waiting).rejects.toThrow(/abort/i);
});

test('every route has its operation', () => {
  const routes = Object.values(OPERATIONS).map(([method, route]) => `${method} ${route}`);
  expect(new Set(routes).size).toBe(routes.length);
});
