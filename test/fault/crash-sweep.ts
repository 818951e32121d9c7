import { spawn } from 'node:child_process';
import { existsSync } from 'node:fs';
import { mkdir, mkdtemp, readdir, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { sql } from 'drizzle-orm';
import { LEASE_MS } from '../../jobs/store/leases.ts';
import { allTables, drain, openTestPortsIn, type TestPorts } from '../runner/test-ports.ts';
import { bundleChild } from './bundle-child.ts';
import { takeInCampaign } from './fault-campaign.ts';

export interface CrashSweep {
  /** Kill points tried. */
  tried: number;
  /** Writes of a run that survives. */
  writes: number;
  /** What was wrong after which kill: empty where everything held. */
  wrong: string[];
}

/**
 * Kills a process at its `from`-th write, then `every` writes later, and so on until it survives. After each kill the next
 * process finds the stores as they are: it sends everything again, runs the jobs, and has to end with the tables of a run
 * that was never killed, with every blob that a row names whole, no job left over and no scan twice.
 */
export async function sweepCrashes({ every, from = 1 }: { every: number; from?: number }): Promise<CrashSweep> {
  const work = await mkdtemp(join(tmpdir(), 'ratespan-crash-'));
  const child = await bundleChild('mortal-child.ts');
  try {
    const expected = await runWhole(join(work, 'whole'));
    const wrong: string[] = [];
    for (let killAt = from, tried = 0; ; killAt += every) {
      const folder = join(work, `kill-${killAt}`);
      await mkdir(folder);
      const { survived, said } = await runChild(child.file, folder, killAt);
      wrong.push(...(await checkAfter(folder, expected)).map((what) => `write ${killAt}: ${what}`));
      await rm(folder, { recursive: true, force: true });
      if (survived) return { tried, writes: Number(said), wrong };
      tried++;
    }
  } finally {
    await rm(work, { recursive: true, force: true });
    await child.remove();
  }
}

function runChild(file: string, folder: string, killAt: number): Promise<{ survived: boolean; said: string }> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [file, folder, String(killAt), 'mortal'], {
      stdio: ['ignore', 'pipe', 'pipe'],
    });
    let [said, complaint] = ['', ''];
    child.stdout.on('data', (part) => (said += part));
    child.stderr.on('data', (part) => (complaint += part));
    child.on('error', reject);
    child.on('close', (code, signal) => {
      if (signal === 'SIGKILL') resolve({ survived: false, said });
      else if (code === 0) resolve({ survived: true, said });
      else reject(new Error(`the child ended with ${code}: ${complaint.slice(-1000)}`));
    });
  });
}

async function runWhole(folder: string): Promise<string> {
  await mkdir(folder);
  const ports = await openTestPortsIn(folder);
  try {
    const id = await takeInCampaign(ports);
    await drain(ports, id);
    return await allTables(ports, id);
  } finally {
    await ports.close();
  }
}

async function checkAfter(folder: string, expected: string): Promise<string[]> {
  const ports = await openTestPortsIn(folder, Date.now());
  try {
    // The leases of the dead lapse.
    ports.clock.advance(LEASE_MS + 1);
    const id = await takeInCampaign(ports);
    await drain(ports, id);
    const wrong = (await allTables(ports, id)) === expected ? [] : ['other tables'];
    return [...wrong, ...(await findHalfDone(ports, folder))];
  } finally {
    await ports.close();
  }
}

/** Blobs that a row names and that are missing or of another size, jobs that are not done, scans that are there twice. */
async function findHalfDone(ports: TestPorts, folder: string): Promise<string[]> {
  const { read } = ports.database;
  const wrong: string[] = [];
  const originals = await read.all<{ path: string; key: string; bytes: number }>(
    sql`select path, blob_key as key, bytes from files`,
  );
  for (const { path, key, bytes } of originals) {
    const size = await ports.blobs.bytes(key).then(
      (b) => b.byteLength,
      () => -1,
    );
    if (size !== bytes) wrong.push(`${path}: a blob of ${size} bytes, not ${bytes}`);
  }
  const derived = await read.all<{ key: string }>(
    sql`select reduced_key as key from scans where reduced_key is not null`,
  );
  for (const { key } of derived) if (!(await ports.blobs.has(key))) wrong.push(`no blob ${key}`);
  const open = await read.all<{ step: string; state: string }>(sql`select step, state from jobs where state <> 'done'`);
  for (const { step, state } of open) wrong.push(`a job ${step} is ${state}`);
  const twice = await read.all<{ path: string }>(sql`
    select path from scans join files on files.id = file_id where files.superseded = 0
    group by path, sample, instrument, segment having count(*) > 1`);
  for (const { path } of twice) wrong.push(`${path} is there twice`);
  const campaigns = await read.all(sql`select id from campaigns`);
  if (campaigns.length !== 1) wrong.push(`${campaigns.length} campaigns`);
  const parts = join(folder, 'blobs/parts');
  // What was half written lies apart, under no key: at most one part for each of the two jobs that the child had in flight.
  if (existsSync(parts) && (await readdir(parts)).length > 2) wrong.push('more than two half-written parts');
  return wrong;
}
