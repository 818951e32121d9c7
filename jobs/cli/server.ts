import { availableParallelism } from 'node:os';
import { type RunningServer, startServer } from '../../api/node.ts';
import type { NodePortsOptions } from '../adapters/node-ports.ts';
import { closePorts, openNodePorts } from '../adapters/node-ports.ts';
import type { Observer } from '../ports/index.ts';
import { createRunner, keepHouseHourly } from '../runner/index.ts';
import { markBlobStore } from '../store/index.ts';
import { leaseOwner } from './environment.ts';
import { UsageError } from './exit.ts';
import type { Terminal } from './terminal.ts';
import { findWebPage } from './web-page.ts';

export interface ServerSettings {
  stores: NodePortsOptions;
  port: number;
  host: string;
  workers?: number;
  /** Take a free port when the wanted one is taken, and say so. */
  anyPort: boolean;
  /** Serve the dashboard too; built first when it is missing. */
  page: boolean;
  observer?: Observer;
}

/** API, page and job runner in this process; `stop` ends all three in order. */
export async function startEverything(
  verb: string,
  { stores, port, host, workers = availableParallelism(), anyPort, page, observer }: ServerSettings,
  terminal: Terminal,
): Promise<{ url: string; stop(): Promise<void> }> {
  const webDir = page ? await findWebPage(terminal) : undefined;
  const ports = await openNodePorts({ ...stores, workers });
  const listen = (at: number): Promise<RunningServer> => startServer({ ports, port: at, host, webDir, observer });
  let server: RunningServer;
  try {
    server = await listen(port).catch((error: NodeJS.ErrnoException) => {
      if (error.code !== 'EADDRINUSE' || !anyPort) throw error;
      terminal.note(`port ${port} is taken; using a free one`);
      return listen(0);
    });
  } catch (error) {
    await closePorts(ports);
    throw listenError(error as NodeJS.ErrnoException, host, port);
  }
  await markBlobStore(ports);
  const runner = createRunner(ports, { concurrency: workers + 1, owner: leaseOwner(verb), observer });
  runner.start();
  const leaving = new AbortController();
  void keepHouseHourly(ports, leaving.signal, observer);
  return {
    url: server.url,
    stop: async () => {
      leaving.abort();
      await server.close();
      await runner.stop();
      await closePorts(ports);
    },
  };
}

function listenError(error: NodeJS.ErrnoException, host: string, port: number): Error {
  if (error.code === 'EADDRINUSE') {
    return new UsageError(`port ${port} on ${host} is taken; give another with --port (0 takes a free one)`);
  }
  if (error.code === 'EACCES' || error.code === 'EADDRNOTAVAIL' || error.code === 'ENOTFOUND') {
    return new UsageError(`cannot listen on ${host}, port ${port}: ${error.message}`);
  }
  // The server refuses an address that other machines can reach.
  return error instanceof RangeError ? new UsageError(error.message) : error;
}

/** Resolves when the user stops the process. */
export function untilInterrupted({ interrupt }: Terminal): Promise<void> {
  return new Promise((resolve) => {
    if (interrupt.aborted) resolve();
    else interrupt.addEventListener('abort', () => resolve(), { once: true });
  });
}
