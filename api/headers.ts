import type { MiddlewareHandler } from 'hono';
import type { ApiEnv } from './access.ts';

/** For everything that is not a page: nothing may be loaded, run or framed. */
const CLOSED_POLICY = "default-src 'none'; frame-ancestors 'none'; base-uri 'none'; form-action 'none'";

/** For the dashboard: own scripts, styles and requests; images also from data and blob (saved charts). */
export const PAGE_POLICY = [
  "default-src 'none'",
  "script-src 'self'",
  "style-src 'self'",
  "img-src 'self' data: blob:",
  "font-src 'self'",
  "connect-src 'self'",
  "manifest-src 'self'",
  "base-uri 'none'",
  "form-action 'none'",
  "frame-ancestors 'none'",
].join('; ');

const FIXED: Record<string, string> = {
  'x-content-type-options': 'nosniff',
  'referrer-policy': 'no-referrer',
  'cross-origin-resource-policy': 'same-origin',
  'cross-origin-opener-policy': 'same-origin',
  'x-frame-options': 'DENY',
};

/** Adds the security headers to every answer; a route that set a content policy or a cache rule keeps its own. */
export const secureAnswers: MiddlewareHandler<ApiEnv> = async (c, next) => {
  await next();
  for (const [name, value] of Object.entries(FIXED)) c.res.headers.set(name, value);
  if (!c.res.headers.has('content-security-policy')) c.res.headers.set('content-security-policy', CLOSED_POLICY);
  if (!c.res.headers.has('cache-control')) c.res.headers.set('cache-control', 'no-store');
};
