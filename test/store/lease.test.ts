import { eq, sql } from 'drizzle-orm';
import { describe, expect, it } from 'vitest';
import { LateWorker, runBatch } from '../../jobs/store/fence.ts';
import { insertJob } from '../../jobs/store/job-rows.ts';
import {
  backOffMs,
  type ClaimedJob,
  claimJobs,
  completeJob,
  extendLeases,
  failAttempt,
  LEASE_MS,
  MAX_ATTEMPTS,
} from '../../jobs/store/leases.ts';
import { campaigns, files, jobs } from '../../schema/tables/index.ts';
import { forEachTest } from '../runner/each-test.ts';
import type { TestPorts } from '../runner/test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

const queue = (id: string, subject = id) =>
  ports.database.write((db) =>
    runBatch(db, [insertJob({ id, campaignId: campaign, step: 'read-scan', subject, now: ports.clock.now() })]),
  );
const claim = (owner: string, limit = 10) => claimJobs(ports, { owner, limit });
const jobRow = async (id: string) => (await ports.database.read.select().from(jobs).where(eq(jobs.id, id)))[0];
const insertFile = (db: TestPorts['database']['read'], id: string) =>
  db.insert(files).values({
    id,
    campaignId: campaign,
    path: id,
    sha256: id,
    bytes: 1,
    blobKey: `x/${id}`,
    kind: 'sheet',
    state: 'unread',
    createdAt: 0,
  });

describe('claiming', () => {
  it('takes what was never leased and what was leased long ago, not what was leased lately', async () => {
    await queue('never');
    await queue('lately');
    await queue('long-ago');
    const now = ports.clock.now();
    await ports.database.write((db) =>
      db.run(sql`update jobs set state = 'running', generation = 4, attempts = 1, leased_by = 'other',
        leased_until = case id when 'lately' then ${now + 1} else ${now - 1} end where id <> 'never'`),
    );
    const taken = await claim('me');
    expect(taken.map(({ id, generation }) => [id, generation]).sort()).toEqual([
      ['long-ago', 5],
      ['never', 1],
    ]);
    expect(await jobRow('lately')).toMatchObject({ leasedBy: 'other', generation: 4 });
    // The control: a moment later the third lease is over as well.
    ports.clock.advance(2);
    expect((await claim('me')).map((job) => job.id)).toEqual(['lately']);
  });

  it('gives each job to one of many claimants', async () => {
    for (let i = 0; i < 30; i++) await queue(`j${i}`);
    const taken = await Promise.all(Array.from({ length: 20 }, (_, i) => claim(`w${i}`, 2)));
    const ids = taken.flat().map((job) => job.id);
    expect(ids).toHaveLength(30);
    expect(new Set(ids).size).toBe(30);
  });

  it('keeps a second job on the same subject waiting while the first runs', async () => {
    await queue('first', 'f');
    const [first] = await claim('me');
    await queue('second', 'f');
    expect(await claim('me')).toEqual([]);
    await completeJob(ports, first);
    expect((await claim('me')).map((job) => job.id)).toEqual(['second']);
  });

  it('leaves a job alone until its next try is due', async () => {
    await queue('later');
    await ports.database.write((db) => db.update(jobs).set({ nextTryAt: ports.clock.now() + 1000 }));
    expect(await claim('me')).toEqual([]);
    ports.clock.advance(1000);
    expect(await claim('me')).toHaveLength(1);
  });
});

describe('the fence', () => {
  it('lets a late worker change nothing at all', async () => {
    await queue('job');
    const [late] = await claim('slow');
    ports.clock.advance(LEASE_MS + 1);
    const [held] = await claim('quick');
    expect(held.generation).toBe(late.generation + 1);
    const before = await ports.database.read.select().from(campaigns);

    await expect(completeJob(ports, late, (db) => [insertFile(db, 'late')])).rejects.toThrow(LateWorker);
    await expect(failAttempt(ports, late, 'too late', () => [])).rejects.toThrow(LateWorker);
    expect(await ports.database.read.select().from(files)).toEqual([]);
    expect(await ports.database.read.select().from(campaigns)).toEqual(before);
    expect(await jobRow('job')).toMatchObject({ state: 'running', leasedBy: 'quick', lastError: null });

    // The control: the same batch of the holder goes through.
    await completeJob(ports, held, (db) => [insertFile(db, 'held')]);
    expect((await ports.database.read.select().from(files)).map((file) => file.id)).toEqual(['held']);
    expect(await jobRow('job')).toMatchObject({ state: 'done' });
  });

  it('refuses a second completion of the same lease', async () => {
    await queue('job');
    const [job] = await claim('me');
    await completeJob(ports, job);
    await expect(completeJob(ports, job)).rejects.toThrow(LateWorker);
  });

  it('lets a lapsed lease that nobody took complete', async () => {
    await queue('job');
    const [job] = await claim('me');
    ports.clock.advance(10 * LEASE_MS);
    await completeJob(ports, job);
    expect(await jobRow('job')).toMatchObject({ state: 'done' });
  });

  it('keeps leases that are extended, and says which are lost', async () => {
    await queue('kept');
    await queue('lost');
    const held = await claim('me');
    ports.clock.advance(LEASE_MS - 1);
    await ports.database.write((db) => db.update(jobs).set({ generation: 9 }).where(eq(jobs.id, 'lost')));
    expect(await extendLeases(ports, held)).toEqual(new Set(['kept']));
    ports.clock.advance(LEASE_MS - 1);
    expect((await claim('other')).map((job) => job.id)).toEqual(['lost']);
  });
});

describe('attempts', () => {
  it('are spread over time and end after the last with the subject failed', async () => {
    await queue('job');
    const waits: number[] = [];
    let job: ClaimedJob | undefined;
    for (let attempt = 1; attempt <= MAX_ATTEMPTS; attempt++) {
      [job] = await claim('me');
      expect(job.attempts).toBe(attempt);
      await failAttempt(ports, job, `error ${attempt}`, (db) => [insertFile(db, 'failed')]);
      const row = await jobRow('job');
      expect(row.lastError).toBe(`error ${attempt}`);
      if (attempt === MAX_ATTEMPTS) break;
      expect(row.state).toBe('queued');
      waits.push(row.nextTryAt - ports.clock.now());
      ports.clock.advance(row.nextTryAt - ports.clock.now());
    }
    expect(await jobRow('job')).toMatchObject({ state: 'failed', attempts: MAX_ATTEMPTS });
    expect((await ports.database.read.select().from(files)).map((file) => file.id)).toEqual(['failed']);
    waits.forEach((wait, i) => {
      expect(wait).toBeGreaterThanOrEqual(500 * 2 ** i);
      expect(wait).toBeLessThanOrEqual(1500 * 2 ** i);
    });
  });

  it('back off differently for different jobs', () => {
    expect(new Set(['a', 'b', 'c', 'd'].map((id) => backOffMs(id, 1))).size).toBe(4);
    expect(backOffMs('a', 1)).toBe(backOffMs('a', 1));
    expect(backOffMs('a', 50)).toBeLessThanOrEqual(90_000);
  });

  it('of a worker that vanishes count too: after the last nobody may claim the job', async () => {
    await queue('job');
    for (let attempt = 1; attempt <= MAX_ATTEMPTS; attempt++) {
      expect(await claim('me')).toHaveLength(1);
      ports.clock.advance(LEASE_MS + 1);
    }
    expect(await claim('me')).toEqual([]);
  });
});
