import type { Context, MiddlewareHandler } from 'hono';
import type { Ports } from '../jobs/ports/index.ts';
import { findTokenOwner, LOCAL_LAB } from '../jobs/store/index.ts';
import { TOKEN_ROLES, type TokenRole } from '../schema/wire/states.ts';
import { createRateLimit } from './limits.ts';
import { Problem } from './problems.ts';

/** Who is asking, as every route sees it. All data access is scoped to `lab`. */
export interface Access {
  lab: string;
  role: TokenRole;
  /** Absent on an open server. */
  tokenId?: string;
}

export interface ApiEnv {
  Variables: { access: Access; requestId: string };
}

export interface AccessOptions {
  /** Our port, on a loopback address: the server is open to this machine. Without it every caller needs a token. */
  port?: () => number;
  /** Where a request comes from, for counting failed log-ins. */
  addressOf?: (c: Context) => string | undefined;
}

/** The one place that names the lab of an open server. */
const OPEN_ACCESS: Access = { lab: LOCAL_LAB, role: 'keeper' };

const LOOPBACK_NAMES = ['localhost', '127.0.0.1', '[::1]'];

/** True for an address that only this machine can reach. */
export function isLoopback(host: string): boolean {
  return LOOPBACK_NAMES.includes(host.toLowerCase()) || host === '::1';
}

/** Host header → name and port (80 where none is written); undefined when it cannot be read as one. */
function splitHost(host: string | null): { name: string; port: number } | undefined {
  const match = /^(\[[0-9a-f:]+\]|[^:[\]]+)(?::(\d{1,5}))?$/i.exec(host ?? '');
  return match ? { name: match[1].toLowerCase(), port: match[2] ? Number(match[2]) : 80 } : undefined;
}

/**
 * Refuses what a browser page of another site, a rebound name or a proxy could send to an open server.
 * Returns the refusal, or undefined when the request may pass.
 */
export function refuseForeignRequest(headers: Headers, ownPort: number): Problem | undefined {
  for (const name of headers.keys())
    if (name === 'forwarded' || name === 'via' || name.startsWith('x-forwarded-'))
      return new Problem('proxy-refused', `the header ${name} says that the request was passed on`);
  const written = headers.get('host');
  const host = splitHost(written);
  if (!host || !LOOPBACK_NAMES.includes(host.name) || host.port !== ownPort)
    return new Problem(
      'host-refused',
      `Host is ${JSON.stringify(written ?? '')}; allowed are ${LOOPBACK_NAMES.map((n) => `${n}:${ownPort}`).join(', ')}`,
    );
  const origin = headers.get('origin');
  const ours = LOOPBACK_NAMES.map((n) => `http://${n}${ownPort === 80 ? '' : `:${ownPort}`}`);
  if (origin !== null && !ours.includes(origin.toLowerCase()))
    return new Problem('origin-refused', `Origin is ${JSON.stringify(origin)}; allowed is ${ours.join(', ')}`);
  return undefined;
}

const OPEN_PATHS = ['/v1/openapi.json', '/v1/reference'];

/**
 * The role that a request needs, or undefined where anybody may ask: pages, documents and signs of life hold nothing of a lab.
 * Whatever is not known to be less needs a keeper.
 */
export function roleNeeded(method: string, path: string): TokenRole | undefined {
  if (path === '/metrics') return 'keeper';
  if (!/^\/v1(\/|$)/.test(path) || OPEN_PATHS.includes(path)) return undefined;
  if (method === 'GET' || method === 'HEAD') return 'reader';
  if (method === 'POST' && /^\/v1\/samples\/[^/]+\/forecasts$/.test(path)) return 'reader';
  return method === 'POST' || method === 'PUT' || method === 'PATCH' ? 'sender' : 'keeper';
}

const allows = (role: TokenRole, needed: TokenRole) => TOKEN_ROLES.indexOf(role) >= TOKEN_ROLES.indexOf(needed);

const MINUTE_MS = 60_000;
const FAILED_LOGINS_A_MINUTE = 20;
const REQUESTS_A_MINUTE = 600;

const tooMany = (what: string, waitMs: number) =>
  new Problem('too-many-requests', `${what}; the next is taken in ${Math.ceil(waitMs / 1000)} s`, {
    retryAfterS: waitMs / 1000,
  });

/** Of an IPv6 address the part that one network holds. */
const network = (address: string) => (address.includes(':') ? address.split(':').slice(0, 4).join(':') : address);

/** Checks every request, pages included, and says on whose behalf the routes act. */
export function guardAccess(ports: Ports, options: AccessOptions): MiddlewareHandler<ApiEnv> {
  const failures = createRateLimit(FAILED_LOGINS_A_MINUTE, MINUTE_MS);
  const requests = createRateLimit(REQUESTS_A_MINUTE, MINUTE_MS);

  async function logIn(c: Context<ApiEnv>): Promise<Access> {
    const written = c.req.header('authorization');
    if (written === undefined) throw new Problem('token-needed', 'there is no Authorization header');
    const now = ports.clock.now();
    const from = network(options.addressOf?.(c) ?? '');
    const lockedMs = failures.waitMs(from, now);
    if (lockedMs > 0) throw tooMany('too many failed log-ins from this address', lockedMs);
    const [, token] = /^Bearer +([^\s]+)$/i.exec(written) ?? [];
    const owner = token && (await findTokenOwner(ports, token));
    if (!owner) {
      failures.count(from, now);
      // What was sent is not repeated: it may be a secret with a typing error.
      throw new Problem('token-refused', 'Authorization holds no token that counts');
    }
    const waitMs = requests.waitMs(owner.id, now);
    if (waitMs > 0) throw tooMany(`${REQUESTS_A_MINUTE} requests a minute are taken from a token`, waitMs);
    requests.count(owner.id, now);
    return { lab: owner.lab, role: owner.role, tokenId: owner.id };
  }

  return async (c, next) => {
    if (options.port) {
      const refusal = refuseForeignRequest(c.req.raw.headers, options.port());
      if (refusal) throw refusal;
      c.set('access', OPEN_ACCESS);
      return next();
    }
    const needed = roleNeeded(c.req.method, c.req.path);
    if (needed !== undefined) {
      const access = await logIn(c);
      if (!allows(access.role, needed))
        throw new Problem('role-too-low', `the token is a ${access.role}'s; this needs a ${needed}'s`);
      c.set('access', access);
    }
    return next();
  };
}
