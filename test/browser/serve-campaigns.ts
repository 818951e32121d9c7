import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { inject } from 'vitest';
import { startServer } from '../../api/node.ts';
import { closePorts, openNodePorts } from '../../jobs/adapters/node-ports.ts';
import { createRunner } from '../../jobs/runner/index.ts';

export interface TestServer {
  url: string;
  /** A folder for files of the test; goes with the server. */
  folder: string;
  stop(): Promise<void>;
}

/** The real server, page and job runner in this process, on a fresh database. */
export async function serveCampaigns(): Promise<TestServer> {
  const folder = await mkdtemp(join(tmpdir(), 'ratespan-browser-'));
  const ports = await openNodePorts({ dataDir: join(folder, 'data'), workers: 0 });
  const runner = createRunner(ports, { concurrency: 2, owner: 'browser test' });
  const server = await startServer({ ports, port: 0, host: '127.0.0.1', webDir: inject('webDir') });
  runner.start();
  return {
    url: server.url,
    folder,
    stop: async () => {
      await server.close();
      await runner.stop();
      await closePorts(ports);
      await rm(folder, { recursive: true, force: true });
    },
  };
}

export async function writeFiles(folder: string, files: readonly { path: string; bytes: Uint8Array }[]): Promise<void> {
  for (const { path, bytes } of files) {
    const target = join(folder, path);
    await mkdir(dirname(target), { recursive: true });
    await writeFile(target, bytes);
  }
}
