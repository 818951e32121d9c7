import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { serveStatic } from '@hono/node-server/serve-static';
import { Hono } from 'hono';

const NOT_BUILT = `<!doctype html><html lang="en"><meta charset="utf-8"><title>ratespan</title>
<p>The page is not built yet. Run <code>npm run build:web</code> in the project folder, then load this page again.</p>
<p>The API works without it: see <a href="/v1/reference">the reference</a>.</p></html>
`;

/**
 * Hands out the built page: its files, and `index.html` for every other path, so that `/campaigns/:id` can be opened
 * directly. Until the page is built it says how to build it.
 */
export function createPages(webDir: string): (request: Request) => Promise<Response> {
  const pages = new Hono();
  const index = join(webDir, 'index.html');
  pages.use(async (c, next) => (existsSync(index) ? next() : c.html(NOT_BUILT, 503)));
  pages.use(async (c, next) => {
    await next();
    // File names under assets/ carry a hash of their content.
    const hashed = c.res.ok && c.req.path.startsWith('/assets/');
    c.res.headers.set('cache-control', hashed ? 'public, max-age=31536000, immutable' : 'no-cache');
  });
  // The build leaves compressed forms beside the files.
  pages.use(serveStatic({ root: webDir, precompressed: true }));
  pages.get('/assets/*', (c) => c.text('no such file', 404));
  pages.get('*', serveStatic({ path: index, precompressed: true }));
  return async (request) => pages.fetch(request);
}
