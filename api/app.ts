import { HTTPException } from 'hono/http-exception';
import { methodNotAllowed } from 'hono/method-not-allowed';
import type { Observer, Ports } from '../jobs/ports/index.ts';
import { isStoreTrouble, StoreRefusal, type StoreRefusalCode } from '../jobs/store/index.ts';
import { type AccessOptions, guardAccess } from './access.ts';
import type { StreamTimes } from './event-stream.ts';
import { PAGE_POLICY, secureAnswers } from './headers.ts';
import { answerOnce } from './idempotency.ts';
import { observeRequests } from './observe.ts';
import { type ApiApp, createRouter } from './openapi.ts';
import { Problem, type ProblemCode, problemResponse } from './problems.ts';
import { addCampaignRoutes } from './routes/campaigns.ts';
import { addDocumentRoutes } from './routes/documents.ts';
import { addFileRoutes } from './routes/files.ts';
import { addInstrumentRoutes } from './routes/instruments.ts';
import { addJobRoutes } from './routes/jobs.ts';
import { addOverviewRoutes } from './routes/overview.ts';
import { addResultRoutes } from './routes/results.ts';
import { addSampleRoutes } from './routes/samples.ts';
import { addScanRoutes } from './routes/scans.ts';
import { addStatusRoutes } from './routes/status.ts';
import { addTableRoutes } from './routes/tables.ts';

export interface AppOptions {
  access: AccessOptions;
  /** Answers every GET outside the API: the dashboard. */
  pages?: (request: Request) => Promise<Response>;
  stream?: StreamTimes;
  observer?: Observer;
}

/** After so many seconds a request that met a full or locked store may come again. */
const STORES_WAIT_S = 5;

const STREAM_TIMES: StreamTimes = { pollMs: 500, lifeMs: 60_000 };

const REFUSALS: Record<StoreRefusalCode, ProblemCode> = {
  'campaign-unknown': 'not-found',
  'job-unknown': 'not-found',
  'scan-unknown': 'not-found',
  'scan-superseded': 'scan-superseded',
  'sample-unknown': 'not-found',
  'instrument-unknown': 'not-found',
  'token-unknown': 'not-found',
  'token-invalid': 'invalid-input',
  'name-taken': 'name-taken',
  'name-invalid': 'invalid-input',
  'job-not-failed': 'job-not-failed',
};

/** Turns whatever was thrown into a problem; what is ours to fix is logged and not shown. */
function problemOf(error: Error, requestId: string, observer?: Observer): Problem {
  if (error instanceof Problem) return error;
  if (error instanceof StoreRefusal)
    return new Problem(REFUSALS[error.code], error.message, error.code.startsWith('name') ? { field: 'name' } : {});
  if (error instanceof HTTPException) {
    if (error.status === 400) return new Problem('malformed-json', 'the body could not be read as JSON');
    if (error.status === 415)
      return new Problem('media-type-refused', 'this route takes a body with Content-Type: application/json');
  }
  observer?.trouble('a request failed', error, { request_id: requestId });
  if (isStoreTrouble(error))
    return new Problem('stores-busy', 'the database or the blob store is full, locked or out of reach', {
      retryAfterS: STORES_WAIT_S,
    });
  return new Problem('internal-error', 'the request was understood but could not be carried out');
}

/** The whole HTTP interface over a set of ports; the same object serves Node and the serverless runtime. */
export function createApp(ports: Ports, options: AppOptions): ApiApp {
  const { observer } = options;
  const app = createRouter();
  app.use(observeRequests(ports.clock, observer));
  app.use(secureAnswers);
  app.use(guardAccess(ports, options.access));
  app.use(answerOnce(ports, observer));
  app.use(
    methodNotAllowed({
      app,
      onMethodNotAllowed: (c, methods) =>
        problemResponse(
          new Problem('method-not-allowed', `${c.req.method} is not taken here; allowed: ${methods.join(', ')}`, {
            allow: methods.join(', '),
          }),
        ),
    }),
  );
  addCampaignRoutes(app, ports);
  addFileRoutes(app, ports);
  addStatusRoutes(app, ports, options.stream ?? STREAM_TIMES);
  addOverviewRoutes(app, ports);
  addTableRoutes(app, ports);
  addResultRoutes(app, ports);
  addSampleRoutes(app, ports);
  addScanRoutes(app, ports);
  addInstrumentRoutes(app, ports);
  addJobRoutes(app, ports);
  addDocumentRoutes(app, ports, observer);
  app.onError((error, c) => problemResponse(problemOf(error, c.get('requestId'), observer)));
  app.notFound(async (c) => {
    const read = c.req.method === 'GET' || c.req.method === 'HEAD';
    if (!options.pages || !read || /^\/v1(\/|$)/.test(c.req.path))
      return problemResponse(new Problem('not-found', `there is no route ${c.req.method} ${c.req.path}`));
    const page = await options.pages(c.req.raw);
    const response = new Response(page.body, page);
    response.headers.set('content-security-policy', PAGE_POLICY);
    return response;
  });
  return app;
}
