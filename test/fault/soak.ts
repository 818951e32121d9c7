import { type ChildProcess, spawn } from 'node:child_process';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { sql } from 'drizzle-orm';
import { createRandom } from '../../jobs/numeric/random.ts';
import { allTables, drain, newCampaign, openTestPorts, openTestPortsIn, send } from '../runner/test-ports.ts';
import { bundleChild } from './bundle-child.ts';

const SENDERS = 8;
const WORKERS = 3;
/** Clocks of the workers are apart by up to this, ms. */
const SKEWS_MS = [0, 15_000, 30_000];
const KILL_EVERY_MS = 4_000;
const FIRST_KILL_MS = 300;
/** One delivery in so many is sent twice at once; one in so many is cut off half way and sent again at the end. */
const ODD_DELIVERIES = 50;
const PROBE_EVERY_MS = 100;
/** Text of a scan, filled up to what a short scan has, bytes. */
const SCAN_BYTES = 30_000;

export interface SoakResult {
  scans: number;
  campaigns: number;
  doubled: number;
  cutOff: number;
  kills: number;
  uploadS: number;
  settledS: number;
  /** Answer times of reads while everything runs, ms, ascending. */
  readsMs: number[];
  uploadsMs: number[];
  wrong: string[];
}

const fileOf = (i: number) => ({
  path: `${'ABCDE'[i % 5]}/oven/${i}.txt`,
  text: `rate ${1 + i}`.padEnd(SCAN_BYTES, ' synthetic'),
});

/** The tables that every campaign has to end with: all hold the same files. */
async function expectedTables(scansEach: number): Promise<string> {
  const ports = await openTestPorts();
  try {
    const id = await newCampaign(ports);
    for (let i = 0; i < scansEach; i++) await send(ports, id, fileOf(i).path, fileOf(i).text);
    await drain(ports, id);
    return await allTables(ports, id);
  } finally {
    await ports.close();
  }
}

/**
 * `campaigns` campaigns of `scansEach` scans sent by 8 senders at once over HTTP to one server, worked on by 3 processes of
 * which one is killed every few seconds, with deliveries doubled and cut off, on clocks that disagree. Everything on
 * 127.0.0.1, at most `limitS` long.
 */
export async function soak(options: {
  campaigns: number;
  scansEach: number;
  seed: string;
  limitS: number;
}): Promise<SoakResult> {
  const { campaigns, scansEach, seed, limitS } = options;
  const dataDir = await mkdtemp(join(tmpdir(), 'ratespan-soak-'));
  const child = await bundleChild('soak-process.ts');
  const expected = await expectedTables(scansEach);
  const random = createRandom(seed);
  const children = new Set<ChildProcess>();
  const start = (kind: 'serve' | 'work', skewMs: number): ChildProcess => {
    const started = spawn(process.execPath, [child.file, kind, dataDir, String(skewMs)], {
      stdio: ['pipe', 'pipe', 'inherit'],
    });
    children.add(started);
    started.on('exit', () => children.delete(started));
    return started;
  };
  const deadline = performance.now() + limitS * 1000;
  const result: SoakResult = {
    scans: campaigns * scansEach,
    campaigns,
    doubled: 0,
    cutOff: 0,
    kills: 0,
    uploadS: 0,
    settledS: 0,
    readsMs: [],
    uploadsMs: [],
    wrong: [],
  };
  let over = false;
  try {
    const server = start('serve', 0);
    const url = await new Promise<string>((resolve, reject) => {
      server.stdout?.once('data', (line: Buffer) => resolve(line.toString().trim()));
      server.once('exit', (code) => reject(new Error(`the server ended with ${code}`)));
    });
    const workers = Array.from({ length: WORKERS }, (_, i) => start('work', SKEWS_MS[i]));
    const killing = (async () => {
      for (let n = 0; !over; n++) {
        // The first one early: a small soak on a quiet machine is over before the usual pause.
        await sleep(n === 0 ? FIRST_KILL_MS : KILL_EVERY_MS);
        if (over) return;
        workers[n % WORKERS].kill('SIGKILL');
        workers[n % WORKERS] = start('work', SKEWS_MS[n % WORKERS]);
        result.kills++;
      }
    })();
    const ids: string[] = [];
    for (let c = 0; c < campaigns; c++) {
      const made = await fetch(`${url}/v1/campaigns`, {
        method: 'POST',
        headers: { 'content-type': 'application/json' },
        body: JSON.stringify({ name: `soak ${c}` }),
      });
      ids.push(((await made.json()) as { id: string }).id);
    }
    const probing = (async () => {
      const routes = ['', '/status', '/parameters?limit=100', '/scans?limit=100', '/coverage'];
      for (let n = 0; !over; n++) {
        const from = performance.now();
        const answer = await fetch(`${url}/v1/campaigns/${ids[n % ids.length]}${routes[n % routes.length]}`);
        await answer.arrayBuffer();
        if (answer.status !== 200) result.wrong.push(`a read answered ${answer.status}`);
        result.readsMs.push(performance.now() - from);
        await sleep(PROBE_EVERY_MS);
      }
    })();

    const began = performance.now();
    const again: { id: string; i: number }[] = [];
    const put = async (id: string, i: number, signal?: AbortSignal) => {
      const { path, text } = fileOf(i);
      const from = performance.now();
      const answer = await fetch(`${url}/v1/campaigns/${id}/files?path=${encodeURIComponent(path)}`, {
        method: 'PUT',
        body: text,
        signal,
      });
      await answer.arrayBuffer();
      if (answer.status !== 202) result.wrong.push(`an upload answered ${answer.status}`);
      result.uploadsMs.push(performance.now() - from);
    };
    // Deliveries of all campaigns in an order of chance, as several labs send at once.
    const queue = ids.flatMap((id) => Array.from({ length: scansEach }, (_, i) => ({ id, i })));
    for (let k = queue.length - 1; k > 0; k--) {
      const other = random.integer(k + 1);
      [queue[k], queue[other]] = [queue[other], queue[k]];
    }
    const sender = async () => {
      for (let next = queue.pop(); next; next = queue.pop()) {
        const { id, i } = next;
        const chance = random.integer(ODD_DELIVERIES);
        if (chance === 0) {
          result.doubled++;
          await Promise.all([put(id, i), put(id, i)]);
        } else if (chance === 1) {
          result.cutOff++;
          again.push(next);
          const cut = new AbortController();
          setTimeout(() => cut.abort(), 2);
          await put(id, i, cut.signal).catch(() => undefined);
        } else await put(id, i);
      }
    };
    await Promise.all(Array.from({ length: SENDERS }, sender));
    for (const { id, i } of again) await put(id, i);
    result.uploadS = (performance.now() - began) / 1000;
    const status = async (id: string) =>
      (await (await fetch(`${url}/v1/campaigns/${id}/status`)).json()) as { settled: boolean };
    for (const id of ids) {
      while (!(await status(id)).settled) {
        if (performance.now() > deadline) {
          result.wrong.push(`campaign ${id} is not settled after ${limitS} s`);
          break;
        }
        await sleep(250);
      }
    }
    result.settledS = (performance.now() - began) / 1000;
    over = true;
    await Promise.all([killing, probing]);
    for (const one of [...children]) {
      const ended = new Promise((resolve) => one.once('exit', resolve));
      one.kill('SIGKILL');
      await ended;
    }
    result.wrong.push(...(await checkStores(dataDir, ids, expected)));
    result.readsMs.sort((a, b) => a - b);
    result.uploadsMs.sort((a, b) => a - b);
    return result;
  } finally {
    over = true;
    for (const one of children) one.kill('SIGKILL');
    await child.remove();
    await rm(dataDir, { recursive: true, force: true });
  }
}

/** Nothing lost, nothing twice, nothing left over. */
async function checkStores(dataDir: string, ids: readonly string[], expected: string): Promise<string[]> {
  const ports = await openTestPortsIn(dataDir, Date.now());
  try {
    const wrong: string[] = [];
    for (const id of ids) if ((await allTables(ports, id)) !== expected) wrong.push(`campaign ${id} has other tables`);
    const open = await ports.database.read.all<{ state: string; n: number }>(
      sql`select state, count(*) as n from jobs where state <> 'done' group by state`,
    );
    for (const { state, n } of open) wrong.push(`${n} jobs are ${state}`);
    const twice = await ports.database.read.all<{ n: number }>(sql`
      select count(*) as n from (select 1 from files where superseded = 0 group by campaign_id, path having count(*) > 1)`);
    if (twice[0].n > 0) wrong.push(`${twice[0].n} files are there twice`);
    return wrong;
  } finally {
    await ports.close();
  }
}
