import type { ExecutionContext, Fetcher, MessageBatch, Queue, R2Bucket } from '@cloudflare/workers-types';
import { computeInline } from '../jobs/adapters/compute-inline.ts';
import { openRemoteDatabase } from '../jobs/adapters/libsql-web.ts';
import { pathRules } from '../jobs/adapters/path-rules.ts';
import { createPlatformQueue, type WakeMessage } from '../jobs/adapters/platform-queue.ts';
import { createBucketBlobs } from '../jobs/adapters/r2-blobs.ts';
import { systemClock } from '../jobs/adapters/system-clock.ts';
import type { Ports } from '../jobs/ports/index.ts';
import { consumeWake, sweepWakes } from '../jobs/runner/index.ts';
import { createApp } from './app.ts';
import type { ApiApp } from './openapi.ts';

/** Bindings of wrangler.toml. */
interface Env {
  DB_URL: string;
  DB_TOKEN?: string;
  BLOBS: R2Bucket;
  JOBS: Queue<WakeMessage>;
  ASSETS?: Fetcher;
}

/** Messages that the platform gave up on: their rows are looked through like after a loss. */
const LOST_QUEUE = 'ratespan-jobs-lost';

/** Each look at the database is a request of its own here, and their number is limited: look less often than on Node. */
const STREAM_TIMES = { pollMs: 2_000, lifeMs: 60_000 };

let home: { ports: Ports; app: ApiApp } | undefined;

/** Made once an isolate: the bindings never change within one. */
function homeOf(env: Env): { ports: Ports; app: ApiApp } {
  if (home) return home;
  const ports: Ports = {
    database: openRemoteDatabase(env.DB_URL, env.DB_TOKEN),
    blobs: createBucketBlobs(env.BLOBS),
    queue: createPlatformQueue(env.JOBS),
    clock: systemClock,
    compute: computeInline,
    paths: pathRules,
  };
  const assets = env.ASSETS;
  const app = createApp(ports, {
    // No tokens yet: only the emulation on one's own machine is served, a public address answers 403 to everything.
    access: {},
    pages: assets && (async (request) => (await assets.fetch(request.url)) as unknown as Response),
    stream: STREAM_TIMES,
  });
  home = { ports, app };
  return home;
}

export default {
  fetch: (request: Request, env: Env, context: ExecutionContext) =>
    homeOf(env).app.fetch(request, env, context as never),

  /** One message, one step. What the row says counts: an error that reaches the platform is a crash, and it retries. */
  async queue(batch: MessageBatch<WakeMessage>, env: Env): Promise<void> {
    const { ports } = homeOf(env);
    if (batch.queue === LOST_QUEUE) await sweepWakes(ports);
    else for (const { id, body } of batch.messages) await consumeWake(ports, body.jobId, `message ${id}`);
    batch.ackAll();
  },

  /** Finds jobs whose message was lost or whose worker vanished. */
  scheduled: (_event: unknown, env: Env): Promise<void> => sweepWakes(homeOf(env).ports),
};
