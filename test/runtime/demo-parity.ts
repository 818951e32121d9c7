import { readdirSync, readFileSync } from 'node:fs';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { closePorts, openNodePorts } from '../../jobs/adapters/node-ports.ts';
import { createObserver } from '../../jobs/adapters/observer.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { createCampaign, readTable, receiveFile } from '../../jobs/store/index.ts';
import { csvTable } from '../../schema/wire/result-tables.ts';
import { openHeapGauge } from './isolate-heap.ts';
import { startRuntime } from './start-runtime.ts';

export interface DemoParity {
  /** parameters.csv of both homes. */
  node: string;
  serverless: string;
  /** Steps run in the serverless home: how many, mean and longest time, ms. The runtime has one thread, so time bounds CPU. */
  steps: { step: string; count: number; meanMs: number; longestMs: number }[];
  /** Resident memory of the runtime before the first request and at its highest, MB. */
  idleMb: number;
  peakMb: number;
  /** Memory of the program's isolate alone, MB: before the first file, and the most seen of what is in use and of what is held, buffers included. */
  isolate: { idleMb: number; usedMb: number; heldMb: number; looks: number };
  /** CPU time of a step on Node with one job at a time, mean and longest, ms: claim, step and write-back. */
  nodeCpu: { step: string; meanMs: number; longestMs: number }[];
  /** CPU time of the runtime over the whole campaign, s. */
  cpuS: number;
  /** Requests to the database. */
  databaseRequests: number;
}

/** The whole demo campaign through the real serverless runtime and through Node. */
export async function compareHomes(limitS: number): Promise<DemoParity> {
  const { files } = buildDemoCampaign();
  const { table: node, cpu: nodeCpu } = await runOnNode(files);
  const runtime = await startRuntime({ inspect: true });
  try {
    const authorization = `Bearer ${runtime.token}`;
    const ask = async (method: string, path: string, body?: BodyInit, type?: string) => {
      const headers = { authorization, ...(type && { 'content-type': type }) };
      for (let tries = 1; ; tries++) {
        try {
          return await fetch(new URL(path, runtime.url), { method, body, headers });
        } catch (error) {
          // A kept connection may be closed just as it is used again; what may be sent twice is.
          if (method === 'POST' || tries >= 3) throw error;
        }
      }
    };
    await (await ask('GET', '/readyz')).text();
    const pids = runtimeProcesses();
    const idleMb = residentMb(pids);
    const idleCpuS = cpuSeconds(pids);
    const heap = await watchHeap(runtime.inspector as URL);
    const made = await ask('POST', '/v1/campaigns', '{"name":"demo"}', 'application/json');
    const { id } = (await made.json()) as { id: string };
    let peakMb = idleMb;
    for (const { path, bytes } of files) {
      const put = await ask('PUT', `/v1/campaigns/${id}/files?path=${encodeURIComponent(path)}`, bytes as BodyInit);
      if (put.status !== 202) throw new Error(`${path}: ${put.status} ${await put.text()}`);
      await put.arrayBuffer();
    }
    const deadline = performance.now() + limitS * 1000;
    for (;;) {
      const status = (await (await ask('GET', `/v1/campaigns/${id}/status`)).json()) as {
        settled: boolean;
        jobs: object;
      };
      peakMb = Math.max(peakMb, residentMb(pids));
      if (status.settled) break;
      if (performance.now() > deadline)
        throw new Error(`not settled after ${limitS} s: ${JSON.stringify(status.jobs)}`);
      await sleep(100);
    }
    const serverless = await (await ask('GET', `/v1/campaigns/${id}/parameters?format=csv`)).text();
    const jobs: { step: string; started_at: string; finished_at: string }[] = [];
    for (let after = ''; ; ) {
      const page = (await (await ask('GET', `/v1/jobs?state=done&limit=1000${after}`)).json()) as {
        items: typeof jobs;
        next: string | null;
      };
      jobs.push(...page.items);
      if (page.next === null) break;
      after = `&after=${page.next}`;
    }
    const steps = [...new Set(jobs.map((job) => job.step))].sort().map((step) => {
      const times = jobs
        .filter((job) => job.step === step)
        .map((job) => Date.parse(job.finished_at) - Date.parse(job.started_at));
      return {
        step,
        count: times.length,
        meanMs: times.reduce((a, b) => a + b, 0) / times.length,
        longestMs: Math.max(...times),
      };
    });
    const cpuS = cpuSeconds(pids) - idleCpuS;
    const isolate = await heap.stop();
    const databaseRequests = runtime.bridge.requests;
    return { node, serverless, steps, idleMb, peakMb, isolate, nodeCpu, cpuS, databaseRequests };
  } finally {
    await runtime.close();
  }
}

export interface TableDifference {
  cells: number;
  /** Cells with other text. */
  differing: number;
  /** Of those, how many are no numbers. */
  otherText: number;
  /** Largest relative difference of numbers. */
  worstRelative: number;
}

/** Two CSV tables cell by cell. The mathematical library may differ in the last binary digit from runtime to runtime. */
export function compareTables(one: string, other: string): TableDifference {
  const cellsOf = (text: string) =>
    text
      .trimEnd()
      .split('\n')
      .map((line) => line.split(','));
  const [a, b] = [cellsOf(one), cellsOf(other)];
  const found: TableDifference = { cells: 0, differing: 0, otherText: Math.abs(a.length - b.length), worstRelative: 0 };
  for (const [i, row] of a.entries()) {
    for (const [k, cell] of row.entries()) {
      found.cells++;
      const twin = b[i]?.[k];
      if (cell === twin) continue;
      found.differing++;
      const [x, y] = [Number(cell), Number(twin)];
      if (cell === '' || !twin || !Number.isFinite(x) || !Number.isFinite(y)) found.otherText++;
      else found.worstRelative = Math.max(found.worstRelative, Math.abs(x - y) / Math.max(Math.abs(x), Math.abs(y)));
    }
  }
  return found;
}

const LOOK_EVERY_MS = 20;

/** Looks at the memory of an isolate between its tasks until stopped. What a step has used and not yet freed is in it. */
async function watchHeap(inspector: URL): Promise<{ stop(): Promise<DemoParity['isolate']> }> {
  const gauge = await openHeapGauge(inspector);
  const idle = await gauge.read();
  const found = { idleMb: idle.usedMb + idle.buffersMb, usedMb: 0, heldMb: 0, looks: 0 };
  let over = false;
  const looking = (async () => {
    while (!over) {
      const { usedMb, heapMb, buffersMb } = await gauge.read();
      found.usedMb = Math.max(found.usedMb, usedMb + buffersMb);
      found.heldMb = Math.max(found.heldMb, heapMb + buffersMb);
      found.looks++;
      await sleep(LOOK_EVERY_MS);
    }
  })();
  // Told by `stop`: where something else failed first, the closed runtime must not hide it.
  looking.catch(() => undefined);
  return {
    async stop() {
      over = true;
      await looking;
      gauge.close();
      return found;
    },
  };
}

async function runOnNode(
  files: readonly { path: string; bytes: Uint8Array }[],
): Promise<{ table: string; cpu: DemoParity['nodeCpu'] }> {
  const dataDir = await mkdtemp(join(tmpdir(), 'ratespan-parity-'));
  const ports = await openNodePorts({ dataDir, workers: 0 });
  try {
    const { id } = await createCampaign(ports, 'demo');
    for (const { path, bytes } of files) await receiveFile(ports, id, path, bytes);
    const spent = new Map<string, number[]>();
    let before = process.cpuUsage();
    const observer = createObserver(() => undefined);
    observer.job = ({ step }) => {
      const { user, system } = process.cpuUsage(before);
      before = process.cpuUsage();
      spent.set(step, [...(spent.get(step) ?? []), (user + system) / 1000]);
    };
    await createRunner(ports, { concurrency: 1, owner: 'parity', observer }).drain(id);
    const rows: Record<string, unknown>[] = [];
    for await (const row of readTable(ports, id, 'parameters')) rows.push(row);
    const cpu = [...spent].map(([step, ms]) => ({
      step,
      meanMs: ms.reduce((a, b) => a + b, 0) / ms.length,
      longestMs: Math.max(...ms),
    }));
    return { table: csvTable('parameters', rows), cpu };
  } finally {
    await closePorts(ports);
    await rm(dataDir, { recursive: true, force: true });
  }
}

const statOf = (pid: string): string[] => readFileSync(`/proc/${pid}/stat`, 'utf8').split(') ')[1].split(' ');

/** Runtime processes that this process started. */
function runtimeProcesses(): string[] {
  return readdirSync('/proc').filter((pid) => {
    if (!/^\d+$/.test(pid)) return false;
    try {
      return statOf(pid)[1] === String(process.pid) && readFileSync(`/proc/${pid}/comm`, 'utf8').startsWith('workerd');
    } catch {
      return false;
    }
  });
}

const PAGE_BYTES = 4096;
const TICKS_PER_S = 100;
const residentMb = (pids: readonly string[]): number =>
  pids.reduce((sum, pid) => sum + (Number(statOf(pid)[21]) * PAGE_BYTES) / 1e6, 0);
const cpuSeconds = (pids: readonly string[]): number =>
  pids.reduce((sum, pid) => sum + (Number(statOf(pid)[11]) + Number(statOf(pid)[12])) / TICKS_PER_S, 0);
