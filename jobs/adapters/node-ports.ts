import { mkdir } from 'node:fs/promises';
import { availableParallelism } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Compute, Ports } from '../ports/index.ts';
import { computeInline } from './compute-inline.ts';
import { openComputeThreads } from './compute-threads.ts';
import { createFileBlobs } from './file-blobs.ts';
import { openFileDatabase } from './libsql-node.ts';
import { openRemoteDatabase } from './libsql-web.ts';
import { migrateDatabase } from './migrate.ts';
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
  /** The process answers no requests: it may wait for the disk where that is the quicker way. */
  mute?: boolean;
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
  let compute: Compute;
  try {
    await migrateDatabase(database);
    compute = workers > 0 ? await openComputeThreads(workers) : computeInline;
  } catch (error) {
    database.close();
    throw error;
  }
  return {
    database,
    blobs: createFileBlobs(blobsDir, { blocking: options.mute }),
    queue: createTableQueue(),
    clock: systemClock,
    compute,
    paths: pathRules,
  };
}

const localPath = (url: string | undefined) => (url?.startsWith('file:') ? fileURLToPath(url) : url);

export { migrateDatabase };

export async function closePorts(ports: Ports): Promise<void> {
  await ports.compute.close();
  ports.database.close();
}
