import { createRoute, z } from '@hono/zod-openapi';
import type { Observer, Ports } from '../../jobs/ports/index.ts';
import { checkStores, jobFigures } from '../../jobs/store/index.ts';
import { describeApi } from '../document.ts';
import { type ApiApp, answersOf, bodyOf, NO_QUERY, PROBLEM_ANSWER } from '../openapi.ts';
import { Problem } from '../problems.ts';
import { REFERENCE_STYLE, renderReference } from '../reference-page.ts';

const openapiRoute = createRoute({
  method: 'get',
  path: '/v1/openapi.json',
  summary: 'This interface as an OpenAPI 3.1 document.',
  request: { query: NO_QUERY },
  responses: answersOf(200, z.object({}), 'The document.'),
});

const referenceRoute = createRoute({
  method: 'get',
  path: '/v1/reference',
  summary: 'This interface as a page to read.',
  request: { query: NO_QUERY },
  responses: { 200: bodyOf('text/html', 'The page.'), default: PROBLEM_ANSWER },
});

const aliveRoute = createRoute({
  method: 'get',
  path: '/healthz',
  summary: 'The process is alive.',
  request: { query: NO_QUERY },
  responses: answersOf(200, z.object({ status: z.literal('alive') }), 'Alive.'),
});

const readyRoute = createRoute({
  method: 'get',
  path: '/readyz',
  summary: 'The database and the blob store can be reached.',
  request: { query: NO_QUERY },
  responses: answersOf(200, z.object({ status: z.literal('ready') }), 'Ready.'),
});

const metricsRoute = createRoute({
  method: 'get',
  path: '/metrics',
  summary: 'Figures of this process and of the queue as OpenMetrics. Off loopback for keepers.',
  request: { query: NO_QUERY },
  responses: { 200: bodyOf('application/openmetrics-text', 'The figures.'), default: PROBLEM_ANSWER },
});

/** The queue as figures. No label names a campaign, a sample or a lab. */
async function queueFigures(ports: Ports): Promise<string> {
  const { byState, oldestOpenS } = await jobFigures(ports);
  const counts = Object.entries(byState).map(([state, count]) => `ratespan_jobs{state="${state}"} ${count}\n`);
  return `# TYPE ratespan_jobs gauge\n# HELP ratespan_jobs Jobs in the database by state.\n${counts.join('')}# TYPE ratespan_oldest_open_job_seconds gauge\n# UNIT ratespan_oldest_open_job_seconds seconds\n# HELP ratespan_oldest_open_job_seconds Age of the oldest job that is not done.\nratespan_oldest_open_job_seconds ${oldestOpenS.toFixed(1)}\n`;
}

/** Content policy of the reference page: nothing but its own style, named by hash. */
async function referencePolicy(): Promise<string> {
  const hash = new Uint8Array(await crypto.subtle.digest('SHA-256', new TextEncoder().encode(REFERENCE_STYLE)));
  return `default-src 'none'; style-src 'sha256-${btoa(String.fromCharCode(...hash))}'; frame-ancestors 'none'; base-uri 'none'; form-action 'none'`;
}

export function addDocumentRoutes(app: ApiApp, ports: Ports, observer?: Observer): void {
  app.openapi(openapiRoute, (c) => c.json(describeApi(app) as object, 200));
  app.openapi(referenceRoute, async (c) =>
    c.html(renderReference(describeApi(app)), 200, {
      'content-security-policy': await referencePolicy(),
    }),
  );
  app.openapi(aliveRoute, (c) => c.json({ status: 'alive' as const }, 200));
  app.openapi(readyRoute, async (c) => {
    await checkStores(ports).catch((error) => {
      observer?.trouble('not ready', error);
      throw new Problem('not-ready', 'the database or the blob store cannot be reached');
    });
    return c.json({ status: 'ready' as const }, 200);
  });
  app.openapi(
    metricsRoute,
    async (c) =>
      c.body(`${await queueFigures(ports)}${observer?.figures() ?? ''}# EOF\n`, 200, {
        'content-type': 'application/openmetrics-text; version=1.0.0; charset=utf-8',
      }) as never,
  );
}
