import type { Context, MiddlewareHandler } from 'hono';
import type { Observer, Ports } from '../jobs/ports/index.ts';
import { claimReply, dropReply, keepReply } from '../jobs/store/index.ts';
import type { ApiEnv } from './access.ts';
import { Problem } from './problems.ts';

/** Visible ASCII, so that a key can stand in a log and a header. */
const KEY = /^[\x21-\x7e]{1,200}$/;
/** The longest body of a POST (a form of files), bytes. Longer ones are refused by their route before they are read. */
const BODY_LIMIT = 8e6;
/** Answers longer than this are not kept, characters. */
const KEPT_LIMIT = 1e6;

async function hashRequest(c: Context): Promise<string> {
  const body = await c.req.raw.clone().arrayBuffer();
  const { pathname, search } = new URL(c.req.url);
  const head = new TextEncoder().encode(`${c.req.method} ${pathname}${search} `);
  const bytes = new Uint8Array(head.length + body.byteLength);
  bytes.set(head);
  bytes.set(new Uint8Array(body), head.length);
  return [...new Uint8Array(await crypto.subtle.digest('SHA-256', bytes))]
    .map((b) => b.toString(16).padStart(2, '0'))
    .join('');
}

/**
 * A POST that carries an `Idempotency-Key` is carried out once within a day: the same request again gets the first answer.
 * Answers that a repetition may change (429, 5xx) are not kept. Keys of one lab are unknown to another.
 */
export function answerOnce(ports: Ports, observer?: Observer): MiddlewareHandler<ApiEnv> {
  return async (c, next) => {
    const key = c.req.header('idempotency-key');
    if (c.req.method !== 'POST' || key === undefined) return next();
    if (!KEY.test(key))
      throw new Problem('invalid-input', 'header: Idempotency-Key takes 1 to 200 visible ASCII characters', {
        field: 'idempotency-key',
      });
    if (!(Number(c.req.header('content-length') ?? 0) <= BODY_LIMIT)) return next();
    const access = c.get('access');
    if (!access) return next();
    const { lab } = access;
    const claim = await claimReply(ports, lab, key, await hashRequest(c));
    if (claim.state === 'other-request')
      throw new Problem('key-reused', 'the Idempotency-Key came before with another route or body');
    if (claim.state === 'running')
      throw new Problem('key-in-use', 'the first request with this Idempotency-Key is not answered yet', {
        retryAfterS: 1,
      });
    if (claim.state === 'kept') {
      const { status, contentType, location, body } = claim.reply;
      const headers = new Headers({ 'idempotency-replayed': 'true' });
      if (contentType) headers.set('content-type', contentType);
      if (location) headers.set('location', location);
      return new Response(body, { status, headers });
    }
    try {
      await next();
      const { status, headers } = c.res;
      const body = status < 500 && status !== 429 ? await c.res.clone().text() : undefined;
      if (body === undefined || body.length > KEPT_LIMIT) await dropReply(ports, lab, key);
      else
        await keepReply(ports, lab, key, {
          status,
          contentType: headers.get('content-type'),
          location: headers.get('location'),
          body,
        });
    } catch (error) {
      await dropReply(ports, lab, key).catch((second) => observer?.trouble('a key was not set free', second));
      throw error;
    }
  };
}
