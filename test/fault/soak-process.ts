import { startServer } from '../../api/node.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { openFaultPorts } from './fault-ports.ts';

/**
 * One process of a soak: `serve` answers requests, `work` takes jobs; both on the same stores, each with a clock that is
 * `skewMs` ahead, and with arithmetic in place of the science, so that the pipeline is what is loaded. Ends with its parent.
 */
const [kind, dataDir, skewMs] = process.argv.slice(2);
const ports = await openFaultPorts(dataDir, { skewMs: Number(skewMs) });
if (kind === 'serve') process.stdout.write(`${(await startServer({ ports, port: 0, host: '127.0.0.1' })).url}\n`);
else createRunner(ports, { concurrency: 2, owner: `${kind}-${process.pid}` }).start();
process.stdin.on('end', () => process.exit(0)).resume();
