import type { MiddlewareHandler } from 'hono';
import { Problem } from './problems.ts';

/** Who is asking, as every route sees it. All data access is scoped to `lab`. */
export interface Access {
  lab: string;
  role: 'keeper';
}

export interface ApiEnv {
  Variables: { access: Access };
}

/**
 * Open mode: no tokens, loopback only. `port` is ours. Without it (serverless runtime) the host and port are those of the
 * request's URL, which the platform vouches for, so that a public address is refused.
 */
export interface AccessOptions {
  port?: () => number;
}

/** The one place that names the lab of an open server. */
const OPEN_ACCESS: Access = { lab: 'local', role: 'keeper' };

const LOOPBACK_NAMES = ['localhost', '127.0.0.1', '[::1]'];

/** True for an address that only this machine can reach. */
export function isLoopback(host: string): boolean {
  return LOOPBACK_NAMES.includes(host.toLowerCase()) || host === '::1';
}

/** Throws unless an open server may listen on `host`. */
export function checkListenAddress(host: string): void {
  if (isLoopback(host)) return;
  throw new RangeError(
    `refusing to listen on ${JSON.stringify(host)}: other machines could reach it and this version has no access tokens (a later version brings them). Use localhost, 127.0.0.1 or ::1.`,
  );
}

/** Host header → name and port (80 where none is written); undefined when it cannot be read as one. */
function splitHost(host: string | undefined): { name: string; port: number } | undefined {
  const match = /^(\[[0-9a-f:]+\]|[^:[\]]+)(?::(\d{1,5}))?$/i.exec(host ?? '');
  return match ? { name: match[1].toLowerCase(), port: match[2] ? Number(match[2]) : 80 } : undefined;
}

/**
 * Refuses what a browser page of another site, a rebound name or a proxy could send to an open server.
 * Returns the refusal, or undefined when the request may pass.
 * @param ownPort the port of `written` where not given @param written host and port as asked for
 */
export function refuseForeignRequest(
  headers: Headers,
  ownPort?: number,
  written = headers.get('host') ?? undefined,
): Problem | undefined {
  for (const name of headers.keys())
    if (name === 'forwarded' || name === 'via' || name.startsWith('x-forwarded-'))
      return new Problem('proxy-refused', `the header ${name} says that the request was passed on`);
  const host = splitHost(written);
  const port = ownPort ?? host?.port;
  if (!host || !LOOPBACK_NAMES.includes(host.name) || host.port !== port)
    return new Problem(
      'host-refused',
      `Host is ${JSON.stringify(written ?? '')}; allowed are ${LOOPBACK_NAMES.map((n) => `${n}:${port ?? '<port>'}`).join(', ')}`,
    );
  const origin = headers.get('origin');
  const ours = LOOPBACK_NAMES.map((n) => `http://${n}${port === 80 ? '' : `:${port}`}`);
  if (origin !== null && !ours.includes(origin.toLowerCase()))
    return new Problem('origin-refused', `Origin is ${JSON.stringify(origin)}; allowed is ${ours.join(', ')}`);
  return undefined;
}

/** Checks every request, pages included, and says on whose behalf the routes act. */
export function guardAccess(options: AccessOptions): MiddlewareHandler<ApiEnv> {
  return async (c, next) => {
    const { headers, url } = c.req.raw;
    const refusal = options.port
      ? refuseForeignRequest(headers, options.port())
      : refuseForeignRequest(headers, undefined, new URL(url).host);
    if (refusal) throw refusal;
    c.set('access', OPEN_ACCESS);
    await next();
  };
}
