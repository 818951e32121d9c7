import type { MiddlewareHandler } from 'hono';
import { routePath } from 'hono/route';
import type { Clock, Observer } from '../jobs/ports/index.ts';
import type { ApiEnv } from './access.ts';

/** Names every answer by a request id of our own and tells the observer. A path is told as its pattern, without query. */
export function observeRequests(clock: Clock, observer: Observer | undefined): MiddlewareHandler<ApiEnv> {
  return async (c, next) => {
    const requestId = crypto.randomUUID();
    c.set('requestId', requestId);
    const started = clock.now();
    await next();
    c.res.headers.set('x-request-id', requestId);
    const pattern = routePath(c, -1);
    observer?.request({
      requestId,
      method: c.req.method,
      route: pattern === '/*' || pattern === '*' ? (c.req.path.startsWith('/v1') ? 'none' : 'page') : pattern,
      status: c.res.status,
      durationMs: clock.now() - started,
      tokenId: c.get('access')?.tokenId,
    });
  };
}
