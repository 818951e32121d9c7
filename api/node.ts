import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { getRequestListener } from '@hono/node-server';
import type { Ports } from '../jobs/ports/index.ts';
import { checkListenAddress } from './access.ts';
import { createApp } from './app.ts';
import { createPages } from './static-pages.ts';

export interface ServerOptions {
  ports: Ports;
  /** 0 takes a free port. */
  port: number;
  host: string;
  /** Folder of the built page; without it only the API answers. */
  webDir?: string;
}

export interface RunningServer {
  url: string;
  port: number;
  /** Ends at once: open event streams are cut, clients resume elsewhere. */
  close(): Promise<void>;
}

/** Starts the API and the page on Node. Refuses an address that other machines can reach; rejects when the port is taken. */
export async function startServer({ ports, port, host, webDir }: ServerOptions): Promise<RunningServer> {
  checkListenAddress(host);
  const bareHost = host.replace(/^\[|\]$/g, '');
  let ownPort = port;
  const app = createApp(ports, {
    access: { port: () => ownPort },
    pages: webDir === undefined ? undefined : createPages(webDir),
  });
  const server = createServer(getRequestListener(app.fetch, { overrideGlobalObjects: false }));
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject);
    server.listen(port, bareHost, () => resolve());
  });
  ownPort = (server.address() as AddressInfo).port;
  return {
    url: `http://${bareHost.includes(':') ? `[${bareHost}]` : bareHost}:${ownPort}`,
    port: ownPort,
    close: () =>
      new Promise((resolve, reject) => {
        server.close((error) => (error ? reject(error) : resolve()));
        server.closeAllConnections();
      }),
  };
}
