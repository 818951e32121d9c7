import type { Client, InStatement } from '@libsql/client';
import { drizzle } from 'drizzle-orm/libsql';
import type { Database } from '../ports/index.ts';
import { createFileClient } from './file-client.ts';

/** The driver waits for a lock inside the event loop, so it waits only this long; the rest of the waiting is asynchronous. */
const BUSY_TIMEOUT_MS = 25;
const WRITE_TRIES = 100;
const RETRY_MS = 10;
const RETRY_SPREAD_MS = 40;

/** True when a statement met the lock of another connection. */
export function isBusy(error: unknown): boolean {
  for (let e = error as { code?: unknown; cause?: unknown } | undefined, depth = 0; e && depth < 5; depth++) {
    if (typeof e.code === 'string' && e.code.startsWith('SQLITE_BUSY')) return true;
    e = e.cause as typeof e;
  }
  return false;
}

const pause = () => new Promise((resolve) => setTimeout(resolve, RETRY_MS + Math.random() * RETRY_SPREAD_MS));

/**
 * Repeats `work` while the database is locked by another connection. After SQLITE_BUSY a connection loses later writes in
 * silence (they resolve and are never committed), so it is replaced before anything else is tried on it.
 */
async function retryBusy<T>(client: Client, work: () => Promise<T>): Promise<T> {
  for (let tries = 1; ; tries++) {
    try {
      return await work();
    } catch (error) {
      if (!isBusy(error)) throw error;
      await client.reconnect();
      if (tries >= WRITE_TRIES) throw error;
      await pause();
    }
  }
}

/** The same client, each call of which is repeated when busy, and whose batches take the write lock at their start. */
function withBusyRetry(client: Client): Client {
  return new Proxy(client, {
    get(target, name) {
      if (name === 'execute') return (...args: [InStatement]) => retryBusy(target, () => target.execute(...args));
      if (name === 'batch') {
        return (statements: InStatement[]) => retryBusy(target, () => target.batch(statements, 'read'));
      }
      const value = Reflect.get(target, name, target);
      return typeof value === 'function' ? value.bind(target) : value;
    },
  });
}

/** Batches of drizzle open a deferred transaction by default, which can fail half way when another process writes first. */
function withWriteBatches(client: Client): Client {
  return new Proxy(client, {
    get(target, name) {
      if (name === 'batch') return (statements: InStatement[]) => target.batch(statements, 'write');
      const value = Reflect.get(target, name, target);
      return typeof value === 'function' ? value.bind(target) : value;
    },
  });
}

/**
 * An embedded libSQL file in WAL mode; the path may hold any character. Readers have a connection of their own, so that a
 * reader never sees a connection that met a lock. `write` runs one piece of work at a time in this process and repeats it
 * whole while other processes hold the lock: hand it one statement or one batch.
 */
export async function openFileDatabase(path: string): Promise<Database> {
  const writer = createFileClient(path, BUSY_TIMEOUT_MS);
  await retryBusy(writer, () => writer.execute('pragma journal_mode = wal'));
  const reader = createFileClient(path, BUSY_TIMEOUT_MS);
  const write = drizzle(withWriteBatches(writer));
  let last: Promise<unknown> = Promise.resolve();
  return {
    read: drizzle(withBusyRetry(reader)),
    write(work) {
      const run = () => retryBusy(writer, () => work(write));
      const done = last.then(run, run);
      last = done.catch(() => undefined);
      return done;
    },
    close() {
      reader.close();
      writer.close();
    },
  };
}
