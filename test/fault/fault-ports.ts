import { createFileBlobs } from '../../jobs/adapters/file-blobs.ts';
import { openFileDatabase } from '../../jobs/adapters/libsql-node.ts';
import { migrateDatabase } from '../../jobs/adapters/migrate.ts';
import { pathRules } from '../../jobs/adapters/path-rules.ts';
import { systemClock } from '../../jobs/adapters/system-clock.ts';
import { createTableQueue } from '../../jobs/adapters/table-queue.ts';
import { createArithmeticCompute } from '../runner/arithmetic-compute.ts';

/** The stores of a folder as a process of a fault study has them: its clock is `skewMs` ahead, arithmetic stands in the place of the science. */
export async function openFaultPorts(dataDir: string, { skewMs = 0, blocking = false } = {}) {
  const database = await openFileDatabase(`${dataDir}/ratespan.db`);
  await migrateDatabase(database);
  return {
    database,
    blobs: createFileBlobs(`${dataDir}/blobs`, { blocking }),
    queue: createTableQueue(),
    clock: { ...systemClock, now: () => Date.now() + skewMs },
    compute: createArithmeticCompute(),
    paths: pathRules,
  };
}
