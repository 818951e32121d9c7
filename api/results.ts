import type { Context } from 'hono';
import type { z } from 'zod';
import type { Ports } from '../jobs/ports/index.ts';
import { type Campaign, findCampaign } from '../jobs/store/index.ts';
import { quote } from '../schema/wire/flags.ts';
import type { ApiEnv } from './access.ts';
import { answersOf } from './openapi.ts';
import { Problem } from './problems.ts';

type ApiContext = Context<ApiEnv>;

/** A thing by its id, within the lab of the caller; another lab's is not there. `word` is what a refusal calls it. */
export const requireOf =
  <T>(word: string, find: (ports: Ports, id: string, lab: string) => Promise<T | undefined>) =>
  async (c: ApiContext, ports: Ports, id: string): Promise<T> => {
    const found = await find(ports, id, c.get('access').lab);
    if (!found) throw new Problem('not-found', `there is no ${word} ${quote(id)}`);
    return found;
  };

/** The campaign by id or name. */
export const requireCampaign = requireOf('campaign', findCampaign);

/**
 * Stamps the answer with the state of the campaign. True when the client has just this state already: answer 304 then.
 * The tag is weak: the same state may be worded in other bytes by a later version.
 */
export function isUnchanged(c: ApiContext, campaign: Pick<Campaign, 'id' | 'revision'>): boolean {
  const tag = `W/"${campaign.id}.${campaign.revision}"`;
  c.header('etag', tag);
  c.header('cache-control', 'no-cache');
  const asked = c.req
    .header('if-none-match')
    ?.split(',')
    .map((t) => t.trim());
  return asked?.some((t) => t === '*' || t === tag || `W/${t}` === tag) ?? false;
}

/** Documented on every route that `isUnchanged` guards. */
export const UNCHANGED_ANSWER = { description: 'Unchanged since the state named in If-None-Match.' } as const;

/** Answers of a route that gives JSON and that `isUnchanged` guards. */
export const resultAnswers = <S extends z.ZodType>(schema: S, description: string) => ({
  ...answersOf(200, schema, description),
  304: UNCHANGED_ANSWER,
});

/** A page from one row more than asked for: the row too many says that there is a next page. */
export function pageOf<R extends { id: string }, T>(rows: R[], limit: number, shapeOf: (row: R) => T) {
  return { items: rows.slice(0, limit).map(shapeOf), next: rows.length > limit ? rows[limit - 1].id : null };
}
