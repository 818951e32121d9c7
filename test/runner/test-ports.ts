import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createFileBlobs } from '../../jobs/adapters/file-blobs.ts';
import { openFileDatabase } from '../../jobs/adapters/libsql-node.ts';
import { migrateDatabase } from '../../jobs/adapters/migrate.ts';
import { pathRules } from '../../jobs/adapters/path-rules.ts';
import { createTableQueue } from '../../jobs/adapters/table-queue.ts';
import type { Clock, Ports } from '../../jobs/ports/index.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { createCampaign, type FileReceipt, readTable, receiveFile } from '../../jobs/store/index.ts';
import { csvTable, RESULT_TABLES, type ResultTable } from '../../schema/wire/result-tables.ts';
import { type ArithmeticCompute, createArithmeticCompute } from './arithmetic-compute.ts';

/** A clock that only tests move. */
export interface HandClock extends Clock {
  advance(ms: number): void;
}

export function createHandClock(start = Date.UTC(2026, 0, 1)): HandClock {
  let now = start;
  const sleepers = new Set<{ until: number; wake: () => void }>();
  return {
    now: () => now,
    sleep(ms, signal) {
      return new Promise((resolve) => {
        if (signal?.aborted) return resolve();
        const sleeper = {
          until: now + ms,
          wake: () => {
            sleepers.delete(sleeper);
            signal?.removeEventListener('abort', sleeper.wake);
            resolve();
          },
        };
        sleepers.add(sleeper);
        signal?.addEventListener('abort', sleeper.wake);
      });
    },
    advance(ms) {
      now += ms;
      for (const sleeper of [...sleepers]) if (sleeper.until <= now) sleeper.wake();
    },
  };
}

export interface TestPorts extends Ports {
  clock: HandClock;
  compute: ArithmeticCompute;
  dataDir: string;
  close(): Promise<void>;
}

/** Ports on a folder of their own, which goes with them. */
export async function openTestPorts(): Promise<TestPorts> {
  const dataDir = await mkdtemp(join(tmpdir(), 'ratespan-test-'));
  const ports = await openTestPortsIn(dataDir);
  return {
    ...ports,
    async close() {
      await ports.close();
      await rm(dataDir, { recursive: true, force: true });
    },
  };
}

/** Ports on a folder, with a clock moved by hand and arithmetic in place of the science. */
export async function openTestPortsIn(dataDir: string, start?: number): Promise<TestPorts> {
  const database = await openFileDatabase(join(dataDir, 'ratespan.db'));
  await migrateDatabase(database);
  return {
    database,
    blobs: createFileBlobs(join(dataDir, 'blobs')),
    queue: createTableQueue(),
    paths: pathRules,
    clock: createHandClock(start),
    compute: createArithmeticCompute(),
    dataDir,
    async close() {
      database.close();
    },
  };
}

export const send = (ports: Ports, campaignId: string, path: string, text: string): Promise<FileReceipt> =>
  receiveFile(ports, campaignId, path, new TextEncoder().encode(text));

export async function newCampaign(ports: Ports, name = 'trial'): Promise<string> {
  return (await createCampaign(ports, name)).id;
}

/** Drains a campaign, moving the clock whenever the runner waits for it. */
export async function drain(ports: TestPorts, campaignId?: string, concurrency = 3): Promise<void> {
  let over = false;
  const done = createRunner(ports, { concurrency, owner: 'test' })
    .drain(campaignId)
    .finally(() => {
      over = true;
    });
  while (!over) {
    for (let turn = 0; turn < 20 && !over; turn++) await new Promise((resolve) => setImmediate(resolve));
    // Time for the real disk: on a busy machine the clock would run away from it and leases would lapse.
    if (!over) await new Promise((resolve) => setTimeout(resolve, 1));
    ports.clock.advance(250);
  }
  await done;
}

/** One result table as rows. */
export async function rowsOf(ports: Ports, campaignId: string, table: ResultTable): Promise<Record<string, unknown>[]> {
  const rows: Record<string, unknown>[] = [];
  for await (const row of readTable(ports, campaignId, table)) rows.push(row);
  return rows;
}

/** Every result table as the text of its file. */
export async function allTables(ports: Ports, campaignId: string): Promise<string> {
  let text = '';
  for (const table of Object.keys(RESULT_TABLES) as ResultTable[]) {
    text += `# ${table}\n${csvTable(table, await rowsOf(ports, campaignId, table))}`;
  }
  return text;
}
