import { hostname } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import { closePorts, type NodePortsOptions, openNodePorts } from '../adapters/node-ports.ts';
import { createObserver } from '../adapters/observer.ts';
import type { Observer, Ports } from '../ports/index.ts';

/** Data folder of the server verbs: RATESPAN_DATA, else ./data. */
export const dataFolder = (): string => resolve(process.env.RATESPAN_DATA || 'data');

/** Stores as the environment names them. */
export function storesFromEnvironment(): NodePortsOptions {
  return {
    dataDir: dataFolder(),
    databaseUrl: process.env.RATESPAN_DB_URL || undefined,
    databaseToken: process.env.RATESPAN_DB_TOKEN || undefined,
    blobsDir: process.env.RATESPAN_BLOBS || undefined,
  };
}

export const isRemoteDatabase = ({ databaseUrl }: NodePortsOptions): boolean =>
  /^(libsql|https?|wss?):/.test(databaseUrl ?? '');

/** One JSON object a line on standard error; on a terminal, where a person reads, only what went wrong. */
export const observeOnStderr = (): Observer =>
  createObserver((line) => process.stderr.write(`${line}\n`), process.stderr.isTTY === true);

/** Stores of a database file given on the command line: blobs/ lies beside it. */
export function storesOfFile(file: string): NodePortsOptions {
  const path = resolve(file);
  return { dataDir: dirname(path), databaseUrl: path, blobsDir: join(dirname(path), 'blobs'), mute: true };
}

/** Opens the stores for the time of one call. */
export async function withPorts<T>(options: NodePortsOptions, use: (ports: Ports) => Promise<T>): Promise<T> {
  const ports = await openNodePorts(options);
  try {
    return await use(ports);
  } finally {
    await closePorts(ports);
  }
}

/** Name of this process in leases. */
export const leaseOwner = (verb: string): string => `${verb}-${hostname()}-${process.pid}`;
