import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { createApp } from '../../api/app.ts';
import { openRemoteDatabase } from '../../jobs/adapters/libsql-web.ts';
import { migrateDatabase } from '../../jobs/adapters/migrate.ts';
import { createObserver } from '../../jobs/adapters/observer.ts';
import type { Ports } from '../../jobs/ports/index.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { createCampaign, listJobs, receiveFile } from '../../jobs/store/index.ts';
import { allTables } from '../runner/test-ports.ts';
import { startHranaBridge } from '../runtime/hrana-bridge.ts';
import { FILES } from './fault-campaign.ts';
import { openFaultPorts } from './fault-ports.ts';

export interface Outage {
  /** From the moment the database was gone until it was back, and from then until the campaign was settled, s. */
  goneS: number;
  recoveryS: number;
  /** Answers while it was gone: status and detail, with how often. */
  answers: ReadonlyMap<string, number>;
  /** Uploads that had to be sent again. */
  resent: number;
  /** What the log says of it: sentence, with how often. */
  log: ReadonlyMap<string, number>;
  jobs: number;
  mostAttempts: number;
  failed: number;
  /** Lines of the tables that a campaign without an outage has otherwise. */
  otherLines: string[];
}

const count = (into: Map<string, number>, what: string) => into.set(what, (into.get(what) ?? 0) + 1);
const HOST = 'http://localhost:8787';
/** Each path once: the row of a replaced scan shows what was found before it was replaced, which depends on the time. */
const SENT = FILES.filter(([path], i) => !FILES.slice(i + 1).some(([later]) => later === path));
const LIMIT_MS = 300_000;
const READING_MS = 1_000;

function linesThatDiffer(expected: string, found: string): string[] {
  const [a, b] = [expected.split('\n'), found.split('\n')];
  return [...a.filter((line) => !b.includes(line)), ...b.filter((line) => !a.includes(line))];
}

/** Tables of the same campaign without an outage, on a database file. */
async function undisturbed(): Promise<string> {
  const folder = await mkdtemp(join(tmpdir(), 'ratespan-outage-'));
  const ports = await openFaultPorts(folder);
  try {
    const { id } = await createCampaign(ports, 'trial');
    for (const [path, bytes] of SENT) await receiveFile(ports, id, path, bytes);
    await createRunner(ports, { concurrency: 2, owner: 'alone' }).drain(id);
    return await allTables(ports, id);
  } finally {
    ports.database.close();
    await rm(folder, { recursive: true, force: true });
  }
}

/**
 * A campaign sent to an API over a remote libSQL database that goes away for `seconds` of real time while files arrive and two
 * workers compute, and comes back under the same address.
 */
export async function remoteOutage(seconds: number): Promise<Outage> {
  const expected = await undisturbed();
  const folder = await mkdtemp(join(tmpdir(), 'ratespan-outage-'));
  const bridge = await startHranaBridge(join(folder, 'remote.db'), 'bridge-token');
  const database = openRemoteDatabase(bridge.url, 'bridge-token');
  await migrateDatabase(database);
  const local = await openFaultPorts(folder);
  local.database.close();
  // A reading takes a while, so that jobs are under way when the database goes.
  const compute: Ports['compute'] = {
    ...local.compute,
    readScan: async (...args) => {
      await sleep(READING_MS);
      return local.compute.readScan(...args);
    },
  };
  const ports: Ports = { ...local, database, compute };
  const log = new Map<string, number>();
  const observer = createObserver((line) => {
    const { event, what, end, status } = JSON.parse(line);
    if (event === 'trouble') count(log, what);
    else if (event === 'job' && end !== 'done') count(log, `job ${end}`);
    else if (event === 'request' && status >= 500) count(log, `request ${status}`);
  });
  const app = createApp(ports, { access: { port: () => 8787 }, observer });
  const runners = ['one', 'two'].map((owner) => createRunner(ports, { concurrency: 2, owner, observer }));
  const answers = new Map<string, number>();
  let gone = false;
  let resent = 0;
  const ask = async (path: string, init?: RequestInit) => {
    const answer = await app.request(`${HOST}${path}`, {
      ...init,
      headers: { host: 'localhost:8787', ...init?.headers },
    });
    const body = (await answer.json()) as { detail?: string; settled?: boolean };
    if (gone) count(answers, `${init?.method ?? 'GET'} ${answer.status} ${body.detail ?? ''}`);
    return { answer, body };
  };
  /** As `send` does: again after as long as the answer says. */
  const send = async (id: string, path: string, bytes: Uint8Array): Promise<void> => {
    const [url, headers] = [`/v1/campaigns/${id}/files?path=${path}`, { 'content-length': String(bytes.byteLength) }];
    for (;;) {
      const { answer } = await ask(url, { method: 'PUT', headers, body: bytes as BodyInit });
      if (answer.status === 202) return;
      resent++;
      await sleep(Number(answer.headers.get('retry-after') ?? 1) * 1000);
    }
  };
  try {
    const { id } = await createCampaign(ports, 'trial');
    for (const [path, bytes] of SENT.slice(0, 4)) await send(id, path, bytes);
    for (const runner of runners) runner.start();
    const sending = (async () => {
      for (const [path, bytes] of SENT.slice(4)) await send(id, path, bytes);
    })();
    await sleep(READING_MS);
    await bridge.pause();
    gone = true;
    const goneAt = performance.now();
    while (performance.now() - goneAt < seconds * 1000) {
      await ask(`/v1/campaigns/${id}/status`);
      await ask('/readyz');
      await sleep(2_000);
    }
    gone = false;
    await bridge.resume();
    const backAt = performance.now();
    await sending;
    for (;;) {
      const { body } = await ask(`/v1/campaigns/${id}/status`);
      if (body.settled) break;
      if (performance.now() - backAt > LIMIT_MS) throw new Error(`not settled: ${JSON.stringify(body)}`);
      await sleep(200);
    }
    const recoveryS = (performance.now() - backAt) / 1000;
    for (const runner of runners) await runner.stop();
    const jobs = await listJobs(ports, { campaignId: id });
    return {
      goneS: (backAt - goneAt) / 1000,
      recoveryS,
      answers,
      resent,
      log,
      jobs: jobs.length,
      mostAttempts: Math.max(...jobs.map((job) => job.attempts)),
      failed: jobs.filter((job) => job.state === 'failed').length,
      otherLines: linesThatDiffer(expected, await allTables(ports, id)),
    };
  } finally {
    database.close();
    await bridge.close();
    await rm(folder, { recursive: true, force: true });
  }
}
