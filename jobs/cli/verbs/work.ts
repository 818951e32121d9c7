import { availableParallelism } from 'node:os';
import { createRunner } from '../../runner/index.ts';
import { isBlobStoreMarked, markBlobStore } from '../../store/index.ts';
import { wholeNumber } from '../arguments.ts';
import { isRemoteDatabase, leaseOwner, observeOnStderr, storesFromEnvironment, withPorts } from '../environment.ts';
import { EXIT, UsageError } from '../exit.ts';
import { untilInterrupted } from '../server.ts';
import type { Terminal } from '../terminal.ts';

/** `work`: takes jobs from the database until Ctrl+C, which is its normal end. */
export async function work(
  _positionals: string[],
  values: Record<string, string | boolean | undefined>,
  terminal: Terminal,
): Promise<number> {
  const workers = wholeNumber('work', 'workers', values.workers, [0, 256]) ?? availableParallelism();
  const stores = storesFromEnvironment();
  // Blobs in a folder of this machine would be invisible to the server that shares the remote database.
  const remote = isRemoteDatabase(stores);
  if (remote && stores.blobsDir === undefined) {
    throw new UsageError(
      'the database is remote, so the folder of originals and curves must be named: set RATESPAN_BLOBS to the shared mount',
    );
  }
  return withPorts({ ...stores, workers }, async (ports) => {
    if (!remote) await markBlobStore(ports);
    else if (!(await isBlobStoreMarked(ports)))
      throw new UsageError(
        `RATESPAN_BLOBS (${stores.blobsDir}) does not hold the originals of this database: its marker is missing. Mount the folder that the server uses; a server that has run once has marked it.`,
      );
    const observer = observeOnStderr();
    const runner = createRunner(ports, { concurrency: workers + 1, owner: leaseOwner('work'), observer });
    runner.start();
    terminal.note(`taking jobs from ${stores.databaseUrl ?? stores.dataDir}; Ctrl+C stops`);
    await untilInterrupted(terminal);
    await runner.stop();
    return EXIT.done;
  });
}
