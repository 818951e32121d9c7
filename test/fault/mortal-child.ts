import fs from 'node:fs';
import { syncBuiltinESMExports } from 'node:module';
import Connection from 'libsql';

/**
 * A process that takes in a campaign, runs its jobs and kills itself with SIGKILL at its `killAt`-th write: a statement handed
 * to SQLite that is no query, or bytes or a name handed to the file system. Of bytes only the first half gets written.
 * Prints the number of writes when it survives. Arguments: data folder, killAt, owner.
 */
const [dataDir, killAtText, owner] = process.argv.slice(2);
const killAt = Number(killAtText);
let writes = 0;

function dieHere(before?: () => void): void {
  if (++writes !== killAt) return;
  before?.();
  process.kill(process.pid, 'SIGKILL');
  // The signal is on its way; nothing more may happen until it arrives.
  Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, 10_000);
}

type Call = (...args: never[]) => unknown;
const patch = (holder: Record<string, Call>, name: string, before: (...args: never[]) => void) => {
  const real = holder[name];
  holder[name] = function (this: unknown, ...args: never[]) {
    before(...args);
    return real.apply(this, args);
  };
};

const { writeSync } = fs;
const files = fs as unknown as Record<string, Call>;
patch(files, 'write', (fd: number, bytes: Uint8Array) =>
  dieHere(() => writeSync(fd, bytes.subarray(0, bytes.byteLength >> 1))),
);
patch(files, 'writeSync', (fd: number, bytes: Uint8Array) =>
  dieHere(() => writeSync(fd, bytes.subarray(0, bytes.byteLength >> 1))),
);
patch(files, 'renameSync', () => dieHere());
patch(files, 'rmSync', () => dieHere());
patch(fs.promises as unknown as Record<string, Call>, 'rename', () => dieHere());
patch(fs.promises as unknown as Record<string, Call>, 'rm', () => dieHere());
syncBuiltinESMExports();

const probe = new Connection(':memory:');
const statements = Object.getPrototypeOf(probe.prepare('select 1')) as Record<string, Call>;
patch(statements, 'run', () => dieHere());
probe.close();

const { createRunner } = await import('../../jobs/runner/index.ts');
const { takeInCampaign } = await import('./fault-campaign.ts');
const { openFaultPorts } = await import('./fault-ports.ts');

// Both ways of writing blobs are swept: every other process waits for the disk within the call.
const ports = await openFaultPorts(dataDir, { blocking: killAt % 2 === 1 });
await createRunner(ports, { concurrency: 2, owner }).drain(await takeInCampaign(ports));
ports.database.close();
process.stdout.write(`${writes}\n`);
