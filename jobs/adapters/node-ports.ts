import type { Ports } from '../ports/index.ts';

export interface NodePortsOptions {
  /** Folder for `ratespan.db` and `blobs/`, made if missing. */
  dataDir: string;
  /** A remote libSQL URL; default a file in `dataDir`. */
  databaseUrl?: string;
  databaseToken?: string;
  blobsDir?: string;
  /** Worker threads for the computations; 0 computes inline. Default: the cores of the machine. */
  workers?: number;
}

/** Ports of a Node process, migrated and ready; close them with `closePorts`. */
export async function openNodePorts(_options: NodePortsOptions): Promise<Ports> {
  throw new Error('not written yet');
}

export async function closePorts(ports: Ports): Promise<void> {
  await ports.compute.close();
  ports.database.close();
}
