import { existsSync } from 'node:fs';
import { mkdir } from 'node:fs/promises';
import { availableParallelism } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { migrate } from 'drizzle-orm/libsql/migrator';
import type { Database, Ports } from '../ports/index.ts';
import { computeInline } from './compute-inline.ts';
import { createComputeThreads } from './compute-threads.ts';
import { createFileBlobs } from './file-blobs.ts';
import { openFileDatabase } from './libsql-node.ts';
import { openRemoteDatabase } from './libsql-web.ts';
import { pathRules } from './path-rules.ts';
import { systemClock } from './system-clock.ts';
import { createTableQueue } from './table-queue.ts';

export interface NodePortsOptions {
  /** Folder for `ratespan.db` and `blobs/`, made if missing. */
  dataDir: string;
  /** A remote libSQL URL, or the path of a local database file; default `ratespan.db` in `dataDir`. */
  databaseUrl?: string;
  databaseToken?: string;
  blobsDir?: string;
  /** Worker threads for the computations; 0 computes inline. Default: the cores of the machine. */
  workers?: number;
}

const isRemote = (url: string) => /^(libsql|https?|wss?):/.test(url);

/** Ports of a Node process, migrated and ready; close them with `closePorts`. */
export async function openNodePorts(options: NodePortsOptions): Promise<Ports> {
  const { dataDir, databaseUrl, blobsDir = join(dataDir, 'blobs'), workers = availableParallelism() } = options;
  await mkdir(dataDir, { recursive: true });
  const database =
    databaseUrl !== undefined && isRemote(databaseUrl)
      ? openRemoteDatabase(databaseUrl, options.databaseToken)
      : await openFileDatabase(localPath(databaseUrl) ?? join(dataDir, 'ratespan.db'));
  await migrateDatabase(database);
  return {
    database,
    blobs: createFileBlobs(blobsDir),
    queue: createTableQueue(),
    clock: systemClock,
    compute: workers > 0 ? createComputeThreads(workers) : computeInline,
    paths: pathRules,
  };
}

const localPath = (url: string | undefined) => (url?.startsWith('file:') ? fileURLToPath(url) : url);

export async function closePorts(ports: Ports): Promise<void> {
  await ports.compute.close();
  ports.database.close();
}

/** Brings the schema up to date. Of several processes that start together one wins; the others find its work done. */
export async function migrateDatabase(database: Database): Promise<void> {
  const run = () => database.write((db) => migrate(db, { migrationsFolder: migrationsFolder() }));
  try {
    await run();
  } catch {
    await run();
  }
}

/** Two folders up from the sources, one from the built file. */
function migrationsFolder(): string {
  const folders = ['../../schema/migrations', '../schema/migrations'].map((path) =>
    fileURLToPath(new URL(path, import.meta.url)),
  );
  const found = folders.find((folder) => existsSync(join(folder, 'meta', '_journal.json')));
  if (!found) throw new Error(`no migrations found in ${folders.join(' or ')}; install the package whole`);
  return found;
}
