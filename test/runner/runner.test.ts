import { sql } from 'drizzle-orm';
import { describe, expect, it, vi } from 'vitest';
import { consumeWake, createRunner, sweepWakes } from '../../jobs/runner/index.ts';
import { campaignStatus, listJobs, retryJob } from '../../jobs/store/index.ts';
import { claimJobs, LEASE_MS, MAX_ATTEMPTS } from '../../jobs/store/leases.ts';
import { forEachTest } from './each-test.ts';
import { allTables, drain, newCampaign, rowsOf, send, type TestPorts } from './test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

/** Only against a hang: what is waited for is an event. */
const PATIENCE_MS = 15_000;

describe('the runner', () => {
  it('takes what comes while it runs, and stops with nothing in flight', async () => {
    const runner = createRunner(ports, { concurrency: 2, owner: 'me' });
    runner.start();
    for (const n of [1, 2]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    await vi.waitFor(async () => {
      ports.clock.advance(100);
      expect(await campaignStatus(ports, campaign)).toMatchObject({ settled: true, samples: [{ state: 'fitted' }] });
    }, PATIENCE_MS);
    await runner.stop();
    expect(await listJobs(ports, { state: 'running' })).toEqual([]);
  });

  it('shares a campaign between two processes without a result made twice', async () => {
    for (let n = 1; n <= 12; n++) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    await Promise.all([drain(ports, campaign), drain(ports, campaign)]);
    // Where one process reads and the other reduces, the original is read by both.
    expect(ports.compute.counts).toMatchObject({ reduceScan: 12, fitSample: 1 });
    expect(ports.compute.counts.readScan).toBeLessThanOrEqual(24);
  });

  it('keeps the lease of a long computation, so that no second worker starts it', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    let finish: (() => void) | undefined;
    const read = ports.compute.readScan;
    ports.compute.readScan = async (bytes, file) => {
      await new Promise<void>((resolve) => {
        finish = resolve;
      });
      return read(bytes, file);
    };
    const done = createRunner(ports, { concurrency: 1, owner: 'me' }).drain(campaign);
    await vi.waitFor(() => {
      ports.clock.advance(100);
      expect(finish).toBeDefined();
    }, PATIENCE_MS);
    for (let i = 0; i < 12; i++) {
      ports.clock.advance(LEASE_MS / 3);
      await new Promise((resolve) => setTimeout(resolve, 10));
      expect(
        await claimJobs(ports, {
          owner: 'other',
          limit: 5,
          jobId: (await listJobs(ports, { state: 'running' }))[0].id,
        }),
      ).toEqual([]);
    }
    finish?.();
    await done;
    expect((await campaignStatus(ports, campaign)).scans.reduced).toBe(1);
  });

  it('ends a job whose worker vanished on its last attempt', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    await ports.database.write((db) =>
      db.run(sql`update jobs set state = 'running', attempts = ${MAX_ATTEMPTS}, generation = 5, leased_until = ${ports.clock.now() - 1}
        where step = 'read-scan'`),
    );
    await drain(ports, campaign);
    const [row] = await rowsOf(ports, campaign, 'scans');
    expect(row).toMatchObject({ status: 'failed', reason: expect.stringContaining('vanished') });
  });

  it('tries a failed job again on request, with everything that hangs on it', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    await send(ports, campaign, 'A/oven/2.txt', 'rate 2');
    const read = ports.compute.readScan;
    ports.compute.readScan = async (bytes, file) => {
      if (file.endsWith('2.txt')) throw new Error('out of memory');
      return read(bytes, file);
    };
    await drain(ports, campaign);
    expect((await campaignStatus(ports, campaign)).samples).toMatchObject([{ state: 'insufficient' }]);
    const [failed] = await listJobs(ports, { state: 'failed' });
    await expect(retryJob(ports, failed.id, 'elsewhere')).rejects.toThrow('there is no job');

    ports.compute.readScan = read;
    expect(await retryJob(ports, failed.id)).toMatchObject({ state: 'queued', attempts: 0, last_error: null });
    await drain(ports, campaign);
    expect(await campaignStatus(ports, campaign)).toMatchObject({
      scans: { reduced: 2 },
      samples: [{ state: 'fitted' }],
    });
    await expect(retryJob(ports, failed.id)).rejects.toThrow('only a failed job');
  });
});

describe('wake-ups delivered one by one', () => {
  /** A queue of messages, as the platform keeps it: with doubles and losses. */
  function messages() {
    const sent: string[] = [];
    return {
      sent,
      queue: {
        wake: async (jobId: string) => {
          sent.push(jobId);
        },
      },
    };
  }

  async function consumeAll(trial: TestPorts, sent: string[]): Promise<void> {
    for (let id = sent.shift(); id !== undefined; id = sent.shift()) {
      trial.clock.advance(1000);
      await consumeWake(trial, id, 'consumer');
    }
  }

  it('lead to the same tables as the runner, doubled ones to nothing more', async () => {
    const { sent, queue } = messages();
    const doubled = {
      wake: async (jobId: string) => {
        await queue.wake(jobId);
        await queue.wake(jobId);
      },
    };
    for (const n of [1, 2, 3]) await send(ports, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    await drain(ports, campaign);
    const other = { ...ports, queue: doubled };
    const second = await newCampaign(other, 'second');
    for (const n of [1, 2, 3]) await send(other, second, `A/oven/${n}.txt`, `rate ${n}`);
    await consumeAll(other, sent);
    expect(await allTables(ports, second)).toBe(await allTables(ports, campaign));
    // Each message is a process of its own, which reads the original of what it reduces.
    expect(ports.compute.counts).toEqual({ readScan: 9, reduceScan: 6, fitSample: 2 });
  });

  it('that are lost are sent again by the sweep', async () => {
    const { sent, queue } = messages();
    const other = { ...ports, queue };
    for (const n of [1, 2]) await send(other, campaign, `A/oven/${n}.txt`, `rate ${n}`);
    sent.length = 0;
    expect((await campaignStatus(ports, campaign)).settled).toBe(false);
    ports.clock.advance(60_000);
    await sweepWakes(other);
    await consumeAll(other, sent);
    expect(await campaignStatus(ports, campaign)).toMatchObject({ settled: true, scans: { reduced: 2 } });
  });
});
