import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { getRequestListener } from '@hono/node-server';
import type { Context } from 'hono';
import type { Observer, Ports } from '../jobs/ports/index.ts';
import { hasLiveToken } from '../jobs/store/index.ts';
import { isLoopback } from './access.ts';
import { createApp } from './app.ts';
import { createPages } from './static-pages.ts';

export interface ServerOptions {
  ports: Ports;
  /** 0 takes a free port. */
  port: number;
  host: string;
  /** Folder of the built page; without it only the API answers. */
  webDir?: string;
  observer?: Observer;
}

export interface RunningServer {
  url: string;
  port: number;
  /** Ends at once: open event streams are cut, clients resume elsewhere. */
  close(): Promise<void>;
}

/** The address at the other end of the connection; what headers say of it may be made up. */
const peerOf = (c: Context): string | undefined =>
  (c.env as { incoming?: { socket?: { remoteAddress?: string } } }).incoming?.socket?.remoteAddress;

/**
 * Starts the API and the page on Node: open on a loopback address, by token on any other. Throws RangeError where others
 * could reach it and nobody could log in; rejects when the port is taken.
 */
export async function startServer({ ports, port, host, webDir, observer }: ServerOptions): Promise<RunningServer> {
  const open = isLoopback(host);
  if (!open && !(await hasLiveToken(ports)))
    throw new RangeError(
      `refusing to listen on ${JSON.stringify(host)}: other machines could reach it and no access token exists. Make one with: ratespan token add --lab LAB --role keeper. Or use localhost, 127.0.0.1 or ::1.`,
    );
  const bareHost = host.replace(/^\[|\]$/g, '');
  let ownPort = port;
  const app = createApp(ports, {
    access: open ? { port: () => ownPort } : { addressOf: peerOf },
    observer,
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
