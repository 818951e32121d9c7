import { availableParallelism } from 'node:os';
import { createRunner } from '../../runner/index.ts';
import { wholeNumber } from '../arguments.ts';
import { leaseOwner, storesFromEnvironment, withPorts } from '../environment.ts';
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
  if (/^(libsql|https?|wss?):/.test(stores.databaseUrl ?? '') && stores.blobsDir === undefined) {
    throw new UsageError(
      'the database is remote, so the folder of originals and curves must be named: set RATESPAN_BLOBS to the shared mount',
    );
  }
  return withPorts({ ...stores, workers }, async (ports) => {
    const runner = createRunner(ports, { concurrency: workers + 1, owner: leaseOwner('work') });
    runner.start();
    terminal.note(`taking jobs from ${stores.databaseUrl ?? stores.dataDir}; Ctrl+C stops`);
    await untilInterrupted(terminal);
    await runner.stop();
    return EXIT.done;
  });
}
