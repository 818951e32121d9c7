import { startServer } from '../../api/node.ts';
import { createFileBlobs } from '../../jobs/adapters/file-blobs.ts';
import { openFileDatabase } from '../../jobs/adapters/libsql-node.ts';
import { migrateDatabase } from '../../jobs/adapters/migrate.ts';
import { pathRules } from '../../jobs/adapters/path-rules.ts';
import { systemClock } from '../../jobs/adapters/system-clock.ts';
import { createTableQueue } from '../../jobs/adapters/table-queue.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { createArithmeticCompute } from '../runner/arithmetic-compute.ts';

/**
 * One process of a soak: `serve` answers requests, `work` takes jobs; both on the same stores, each with a clock that is
 * `skewMs` ahead, and with arithmetic in place of the science, so that the pipeline is what is loaded. Ends with its parent.
 */
const [kind, dataDir, skewMs] = process.argv.slice(2);
const database = await openFileDatabase(`${dataDir}/ratespan.db`);
await migrateDatabase(database);
const ports = {
  database,
  blobs: createFileBlobs(`${dataDir}/blobs`),
  queue: createTableQueue(),
  clock: { ...systemClock, now: () => Date.now() + Number(skewMs) },
  compute: createArithmeticCompute(),
  paths: pathRules,
};
if (kind === 'serve') process.stdout.write(`${(await startServer({ ports, port: 0, host: '127.0.0.1' })).url}\n`);
else createRunner(ports, { concurrency: 2, owner: `${kind}-${process.pid}` }).start();
process.stdin.on('end', () => process.exit(0)).resume();
