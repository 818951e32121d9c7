import { readdir, truncate } from 'node:fs/promises';
import { join } from 'node:path';
import { eq, sql } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { createObserver } from '../../jobs/adapters/observer.ts';
import type { JobEvent, Ports } from '../../jobs/ports/index.ts';
import { createRunner, keepHouse } from '../../jobs/runner/index.ts';
import { createCampaign, deleteCampaign, receiveFile, refitCampaign } from '../../jobs/store/index.ts';
import { LEASE_MS, MAX_ATTEMPTS } from '../../jobs/store/leases.ts';
import { isStoreTrouble } from '../../jobs/store/trouble.ts';
import { files, jobs, scans } from '../../schema/tables/index.ts';
import { allTables, drain, openTestPorts, type TestPorts } from '../runner/test-ports.ts';
import { takeInCampaign } from './fault-campaign.ts';

let ports: TestPorts;
let expected: string;
beforeEach(async () => {
  const whole = await openTestPorts();
  const id = await takeInCampaign(whole);
  await drain(whole, id);
  expected = await allTables(whole, id);
  await whole.close();
  ports = await openTestPorts();
});
afterEach(() => ports.close());

const coded = (code: string) => Object.assign(new Error(`${code}: of the system`), { code });

/** Runs the jobs for a while of the hand-moved clock, with time for the real disk between, then stops. */
async function runFor(on: Ports, ms: number): Promise<void> {
  const runner = createRunner(on, { concurrency: 2, owner: 'test' });
  runner.start();
  for (let passed = 0; passed < ms; passed += 1_000) {
    await new Promise((resolve) => setTimeout(resolve, 5));
    ports.clock.advance(1_000);
  }
  await runner.stop();
}

describe('a full disk', () => {
  test('under the blobs: work waits, says why, uses up no attempt, and goes on when there is room', async () => {
    let full = true;
    const blobs = {
      ...ports.blobs,
      put: async (...args: Parameters<Ports['blobs']['put']>) => {
        if (full && args[0].startsWith('derived/')) throw coded('ENOSPC');
        return ports.blobs.put(...args);
      },
    };
    const narrow = { ...ports, blobs };
    const id = await takeInCampaign(narrow);
    // Far longer than the attempts of a step that fails would last.
    await runFor(narrow, 3 * 60_000);
    const waiting = await ports.database.read.select().from(jobs).where(eq(jobs.step, 'reduce-scan'));
    const held = waiting.filter((job) => job.state === 'queued');
    expect(held.length).toBeGreaterThan(2);
    for (const job of held) {
      expect(job.attempts).toBe(0);
      expect(job.lastError).toMatch(/^waits for the stores: ENOSPC/);
    }
    expect(waiting.some((job) => job.state === 'failed')).toBe(false);
    full = false;
    await drain(ports, id);
    expect(await allTables(ports, id)).toBe(expected);
  });

  test('under the database: nothing can be noted, leases lapse, and all is done in the end', async () => {
    let full = false;
    const database = {
      ...ports.database,
      write: <T>(work: (db: TestPorts['database']['read']) => Promise<T>) =>
        full ? Promise.reject(coded('SQLITE_FULL')) : ports.database.write(work),
    };
    const narrow = { ...ports, database };
    const id = await takeInCampaign(narrow);
    const read = ports.compute.readScan;
    narrow.compute = {
      ...ports.compute,
      readScan: (...args) => {
        full = true;
        return read(...args);
      },
    };
    await runFor(narrow, 3 * LEASE_MS);
    expect(full).toBe(true);
    full = false;
    ports.clock.advance(LEASE_MS + 1);
    await drain(ports, id);
    expect(await allTables(ports, id)).toBe(expected);
  });
});

test('a step that always throws does fail: only the stores are waited for', async () => {
  expect(isStoreTrouble(new Error('cannot read property'))).toBe(false);
  expect(isStoreTrouble(new Error('query failed', { cause: coded('SQLITE_BUSY_SNAPSHOT') }))).toBe(true);
  expect(isStoreTrouble(coded('SQLITE_CONSTRAINT_CHECK'))).toBe(false);
  expect(isStoreTrouble(new TypeError('fetch failed', { cause: coded('ECONNREFUSED') }))).toBe(true);
  expect(isStoreTrouble(undefined)).toBe(false);
  const { id } = await createCampaign(ports, 'trial');
  await receiveFile(ports, id, 'A/oven/1.txt', new TextEncoder().encode('poison'));
  await drain(ports, id);
  const [job] = await ports.database.read.select().from(jobs).where(eq(jobs.step, 'read-scan'));
  expect(job).toMatchObject({ state: 'failed', attempts: MAX_ATTEMPTS });
});

test('an upload that breaks off leaves no file and no blob', async () => {
  const { id } = await createCampaign(ports, 'trial');
  const body = new ReadableStream<Uint8Array>({
    pull(controller) {
      controller.enqueue(new Uint8Array(3e6));
      if (controller.desiredSize !== null && this.sent++ > 1) controller.error(new Error('the connection is gone'));
    },
    sent: 0,
  } as UnderlyingDefaultSource<Uint8Array> & { sent: number });
  await expect(receiveFile(ports, id, 'A/oven/long.txt', body, 50e6)).rejects.toThrow('the connection is gone');
  expect(await ports.database.read.select().from(files)).toEqual([]);
  expect(await readdir(join(ports.dataDir, 'blobs/parts'))).toEqual([]);
  for await (const { key } of ports.blobs.list('originals/')) expect(key).toBe('none');
});

test.each(['deleted', 'cut'])('reduced curves that were %s are made again under a fit', async (how) => {
  const id = await takeInCampaign(ports);
  await drain(ports, id);
  const [lost] = await ports.database.read.select({ key: scans.reducedKey }).from(scans).where(eq(scans.sample, 'A'));
  if (how === 'deleted') await ports.blobs.delete(lost.key as string);
  else await truncate(join(ports.dataDir, 'blobs', lost.key as string), 200);
  // The stored fit goes too, so that the curves are needed.
  for await (const { key } of ports.blobs.list(`derived/${id}/fit-`)) await ports.blobs.delete(key);
  await refitCampaign(ports, id);
  await drain(ports, id);
  expect(await allTables(ports, id)).toBe(expected);
  expect(await ports.blobs.has(lost.key as string)).toBe(true);
});

test('a table that meets lost curves has them made again', async () => {
  const id = await takeInCampaign(ports);
  await drain(ports, id);
  for await (const { key } of ports.blobs.list(`derived/${id}/reduced-`)) await ports.blobs.delete(key);
  expect(await allTables(ports, id)).not.toBe(expected);
  await drain(ports, id);
  expect(await allTables(ports, id)).toBe(expected);
});

function promised() {
  let resolve: () => void = () => {};
  const promise = new Promise<void>((done) => {
    resolve = done;
  });
  return { promise, resolve };
}

test('a stop hands back what is not finished in time, and its late end counts for nothing', async () => {
  const { id } = await createCampaign(ports, 'trial');
  await receiveFile(ports, id, 'A/oven/1.txt', new TextEncoder().encode('rate 1'));
  const [entered, held, ended] = [promised(), promised(), promised()];
  const ends: JobEvent[] = [];
  const slow: Ports = {
    ...ports,
    compute: {
      ...ports.compute,
      readScan: async (...args) => {
        entered.resolve();
        await held.promise;
        return ports.compute.readScan(...args);
      },
    },
  };
  const job = (event: JobEvent) => {
    if (event.step !== 'read-scan') return;
    ends.push(event);
    ended.resolve();
  };
  const runner = createRunner(slow, {
    concurrency: 1,
    owner: 'slow',
    observer: { request() {}, trouble() {}, figures: () => '', job },
  });
  runner.start();
  const jobNow = async () =>
    (await ports.database.read.select().from(jobs).where(eq(jobs.step, 'read-scan')))[0] ?? { state: 'none' };
  const ticking = setInterval(() => ports.clock.advance(250), 5);
  await entered.promise;
  expect(await jobNow()).toMatchObject({ state: 'running' });
  await runner.stop(1_000);
  clearInterval(ticking);
  expect(await jobNow()).toMatchObject({ state: 'queued', attempts: 0, lastError: 'its worker was stopped' });
  held.resolve();
  await ended.promise;
  expect(ends.map((event) => event.end)).toEqual(['late']);
  expect(await jobNow()).toMatchObject({ state: 'queued' });
  await drain(ports, id);
  expect(await jobNow()).toMatchObject({ state: 'done', attempts: 1 });
});

test('housekeeping deletes blobs that nothing names once they are a day old, and no others', async () => {
  const id = await takeInCampaign(ports);
  await drain(ports, id);
  const keysNow = async () => {
    const keys: string[] = [];
    for (const prefix of ['originals/', 'derived/'])
      for await (const { key } of ports.blobs.list(prefix)) keys.push(key);
    return keys.sort();
  };
  const named = await keysNow();
  await ports.blobs.put(`originals/${id}/b_left-by-a-crash`, new Uint8Array(3));
  await ports.blobs.put(`derived/${id}/reduced-${'0'.repeat(64)}`, new Uint8Array(3));
  await ports.blobs.put('originals/c_gone/b_1', new Uint8Array(3));
  // The files are as old as this run; the clock of the ports decides what a day is.
  const at = (ms: number): Ports => ({ ...ports, clock: { ...ports.clock, now: () => ms } });
  await keepHouse(at(Date.now()));
  expect(await keysNow()).toHaveLength(named.length + 3);
  await keepHouse(at(Date.now() + 86_400_001));
  const kept = await keysNow();
  expect(kept.filter((key) => !named.includes(key))).toEqual([]);
  // Of the derived blobs those of replaced inputs may go; everything that a row names stays.
  const originals = await ports.database.read.all<{ key: string }>(sql`select distinct blob_key as key from files`);
  for (const { key } of originals) expect(kept).toContain(key);
  await refitCampaign(ports, id);
  await drain(ports, id);
  expect(await allTables(ports, id)).toBe(expected);
  await deleteCampaign(ports, id);
  expect(await keysNow()).toEqual([]);
});

test('a database out of reach for a day is asked ever less often and fills no log', async () => {
  let [asked, told] = [0, 0];
  const gone = {
    ...ports.database,
    write: () => {
      asked++;
      return Promise.reject(coded('ECONNREFUSED'));
    },
  };
  // No wake-up is heard, so that every rest is on the clock of the test.
  const queue = { wake: async () => undefined };
  const observer = { ...createObserver(() => undefined), trouble: () => void told++ };
  const runner = createRunner({ ...ports, database: gone, queue }, { concurrency: 2, owner: 'test', observer });
  runner.start();
  for (let passed = 0; passed < 86_400_000; passed += 10_000) {
    await new Promise((resolve) => setImmediate(resolve));
    ports.clock.advance(10_000);
  }
  await runner.stop();
  expect(asked).toBeGreaterThan(1_000);
  // Once every ten seconds, and a line at each doubling.
  expect(asked).toBeLessThan(8_700);
  expect(told).toBeLessThan(15);
});
