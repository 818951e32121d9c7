import { mkdir, mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Readable } from 'node:stream';
import { build } from 'esbuild';
import { Miniflare } from 'miniflare';
import { openRemoteDatabase } from '../../jobs/adapters/libsql-web.ts';
import { migrateDatabase } from '../../jobs/adapters/node-ports.ts';
import { systemClock } from '../../jobs/adapters/system-clock.ts';
import type { Database, Ports } from '../../jobs/ports/index.ts';
import { createToken } from '../../jobs/store/index.ts';
import { type HranaBridge, startHranaBridge } from './hrana-bridge.ts';

/** Why the serverless runtime cannot run on this machine, or undefined when it can. */
export async function runtimeProblem(): Promise<string | undefined> {
  const probe = new Miniflare({
    modules: [{ type: 'ESModule', path: 'probe.js', contents: 'export default { fetch: () => new Response("up") }' }],
    cf: false,
  });
  try {
    await (await probe.dispatchFetch('http://localhost/')).text();
    return undefined;
  } catch (error) {
    return String(error).split('\n')[0];
  } finally {
    await probe.dispose().catch(() => undefined);
  }
}

export interface Runtime {
  miniflare: Miniflare;
  /** Where it listens. */
  url: URL;
  database: Database;
  bridge: HranaBridge;
  /** A keeper's token. */
  token: string;
  /** Inspector of the isolate of the program, apart from those of the emulated bucket and queue. */
  inspector?: URL;
  close(): Promise<void>;
}

export interface RuntimeOptions {
  /** The built page; a stand-in without it. */
  pagesDir?: string;
  /** 0 takes a free one. */
  port?: number;
  /** Opens the inspector, which tells the memory of the program's own isolate. */
  inspect?: boolean;
}

/** The program of api/worker.ts as deployed, in the real runtime, over a bucket, a queue and a libSQL server of its own. */
export async function startRuntime({ pagesDir, port = 0, inspect }: RuntimeOptions = {}): Promise<Runtime> {
  const root = new URL('../..', import.meta.url);
  const toml = await readFile(new URL('wrangler.toml', root), 'utf8');
  const setting = (name: string) => new RegExp(`^${name} = "(.+)"$`, 'm').exec(toml)?.[1] as string;
  const [queue, lost] = [setting('queue'), setting('dead_letter_queue')];
  const bundle = await build({
    entryPoints: [new URL(setting('main'), root).pathname],
    bundle: true,
    format: 'esm',
    target: 'es2022',
    write: false,
    conditions: ['workerd', 'worker', 'browser'],
    external: ['node:*', 'cloudflare:*'],
  });
  const folder = await mkdtemp(join(tmpdir(), 'ratespan-runtime-'));
  const pages = join(folder, 'pages');
  await mkdir(pages);
  await writeFile(join(pages, 'index.html'), '<!doctype html><title>page</title>');
  const bridge = await startHranaBridge(join(folder, 'remote.db'), 'bridge-token');
  const database = openRemoteDatabase(bridge.url, 'bridge-token');
  await migrateDatabase(database);
  const { token } = await createToken({ database, clock: systemClock } as Ports, {
    lab: 'serverless',
    role: 'keeper',
    days: 1,
  });
  const miniflare = new Miniflare({
    host: '127.0.0.1',
    port,
    cf: false,
    ...(inspect && { inspectorPort: 0 }),
    // Its log lines are not for the report of the tests.
    handleRuntimeStdio: (out: Readable, err: Readable) => {
      out.resume();
      err.resume();
    },
    modules: [{ type: 'ESModule', path: 'worker.js', contents: bundle.outputFiles[0].text }],
    compatibilityDate: setting('compatibility_date'),
    compatibilityFlags: ['nodejs_compat'],
    bindings: { DB_URL: bridge.url, DB_TOKEN: 'bridge-token' },
    assets: {
      directory: pagesDir ?? pages,
      binding: 'ASSETS',
      routerConfig: { has_user_worker: true, invoke_user_worker_ahead_of_assets: true },
      assetConfig: { not_found_handling: 'single-page-application' },
    },
    r2Buckets: ['BLOBS'],
    queueProducers: { JOBS: queue },
    queueConsumers: {
      [queue]: { maxBatchSize: 1, maxBatchTimeout: 0, maxRetries: 2, deadLetterQueue: lost },
      [lost]: { maxBatchSize: 10, maxBatchTimeout: 0 },
    },
  });
  const url = await miniflare.ready;
  return {
    miniflare,
    url,
    database,
    bridge,
    token,
    ...(inspect && { inspector: new URL('/core:user:', await miniflare.getInspectorURL()) }),
    close: async () => {
      await miniflare.dispose();
      database.close();
      await bridge.close();
      await rm(folder, { recursive: true, force: true });
    },
  };
}
