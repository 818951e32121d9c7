import type {
  ExecutionContext,
  Fetcher,
  MessageBatch,
  Queue,
  R2Bucket,
  ScheduledController,
} from '@cloudflare/workers-types';
import { computeInline } from '../jobs/adapters/compute-inline.ts';
import { openRemoteDatabase } from '../jobs/adapters/libsql-web.ts';
import { createObserver } from '../jobs/adapters/observer.ts';
import { pathRules } from '../jobs/adapters/path-rules.ts';
import { createPlatformQueue, type WakeMessage } from '../jobs/adapters/platform-queue.ts';
import { createBucketBlobs } from '../jobs/adapters/r2-blobs.ts';
import { systemClock } from '../jobs/adapters/system-clock.ts';
import type { Observer, Ports } from '../jobs/ports/index.ts';
import { consumeWake, endGivenUpJob, keepHouse, sweepWakes } from '../jobs/runner/index.ts';
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

/** Messages that the platform gave up on. */
const LOST_QUEUE = 'ratespan-jobs-lost';

/** Each look at the database is a request of its own here, and their number is limited: look less often than on Node. */
const STREAM_TIMES = { pollMs: 2_000, lifeMs: 60_000 };

/** Minutes after midnight UTC from which, and for how long, the daily housekeeping is due: once at a cron of five minutes. */
const HOUSE_FROM_MIN = 180;
const HOUSE_SPAN_MIN = 5;

interface Home {
  ports: Ports;
  app: ApiApp;
  observer: Observer;
}

let home: Home | undefined;

/** Made once an isolate: the bindings never change within one. */
function homeOf(env: Env): Home {
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
  const observer = createObserver((line) => console.log(line));
  const app = createApp(ports, {
    // The platform sets this header itself and overwrites what a caller sends.
    access: { addressOf: (c) => c.req.header('cf-connecting-ip') },
    observer,
    pages: assets && (async (request) => (await assets.fetch(request.url)) as unknown as Response),
    stream: STREAM_TIMES,
  });
  home = { ports, app, observer };
  return home;
}

export default {
  fetch: (request: Request, env: Env, context: ExecutionContext) =>
    homeOf(env).app.fetch(request, env, context as never),

  /** One message, one step. What the row says counts: an error that reaches the platform is a crash, and it retries. */
  async queue(batch: MessageBatch<unknown>, env: Env): Promise<void> {
    const { ports, observer } = homeOf(env);
    const givenUp = batch.queue === LOST_QUEUE;
    for (const message of batch.messages) {
      const jobId = jobIdOf(message.body);
      if (jobId === undefined) {
        observer.trouble('a message names no job', new Error('unreadable message'), { message_id: message.id });
        // Ends in the queue of lost messages, where it is let go.
        if (!givenUp) {
          message.retry();
          continue;
        }
      } else if (givenUp) await endGivenUpJob(ports, jobId);
      else await consumeWake(ports, jobId, `message ${message.id}`, observer);
      message.ack();
    }
  },

  /** Finds jobs whose message was lost or whose worker vanished; once a day deletes what nothing names. */
  async scheduled({ scheduledTime }: ScheduledController, env: Env): Promise<void> {
    const { ports, observer } = homeOf(env);
    await sweepWakes(ports);
    const minute = Math.floor(scheduledTime / 60_000) % 1440;
    if (minute >= HOUSE_FROM_MIN && minute < HOUSE_FROM_MIN + HOUSE_SPAN_MIN) await keepHouse(ports, observer);
  },
};

function jobIdOf(body: unknown): string | undefined {
  const jobId = (body as Partial<WakeMessage> | null)?.jobId;
  return typeof jobId === 'string' ? jobId : undefined;
}
