import type { Client, InStatement } from '@libsql/client';
import { drizzle } from 'drizzle-orm/libsql';
import type { Database } from '../ports/index.ts';
import { createFileClient } from './file-client.ts';

/** The driver waits for a lock inside the event loop, where it holds up every answer: hardly at all. The rest of the waiting is asynchronous. */
const BUSY_TIMEOUT_MS = 2;
/** How long a write waits for the lock of another process before its caller hears of it. */
const PATIENCE_MS = 10_000;
const SHORTEST_PAUSE_MS = 2;
const LONGEST_PAUSE_MS = 30;

/** True when a statement met the lock of another connection. */
export function isBusy(error: unknown): boolean {
  for (let e = error as { code?: unknown; cause?: unknown } | undefined, depth = 0; e && depth < 5; depth++) {
    if (typeof e.code === 'string' && e.code.startsWith('SQLITE_BUSY')) return true;
    e = e.cause as typeof e;
  }
  return false;
}

/** Nothing had begun when the lock was met: the connection is sound. */
function isSound(error: unknown): boolean {
  for (let e = error as { beforeStart?: unknown; cause?: unknown } | undefined, depth = 0; e && depth < 5; depth++) {
    if (e.beforeStart === true) return true;
    e = e.cause as typeof e;
  }
  return false;
}

/** Longer with each try, with chance in it, so that processes do not meet again in step. */
const pause = (tries: number) =>
  new Promise((resolve) =>
    setTimeout(resolve, Math.min(LONGEST_PAUSE_MS, SHORTEST_PAUSE_MS * tries) * (0.5 + Math.random())),
  );

/**
 * Repeats `work` while the database is locked by another connection. After SQLITE_BUSY on a prepared statement a connection
 * loses later writes in silence (they resolve and are never committed), so it is replaced before anything else is tried on it.
 */
async function retryBusy<T>(client: Client, work: () => Promise<T>): Promise<T> {
  const until = performance.now() + PATIENCE_MS;
  for (let tries = 1; ; tries++) {
    try {
      return await work();
    } catch (error) {
      if (!isBusy(error)) throw error;
      if (!isSound(error)) await client.reconnect();
      if (performance.now() > until) throw error;
      await pause(tries);
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

/** Every call takes the write lock at its start: a lock that is met later can leave half a batch, and a spoilt connection. */
function withWriteLock(client: Client): Client {
  return new Proxy(client, {
    get(target, name) {
      if (name === 'batch') return (statements: InStatement[]) => target.batch(statements, 'write');
      if (name === 'execute') return async (statement: InStatement) => (await target.batch([statement], 'write'))[0];
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
  const write = drizzle(withWriteLock(writer));
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
