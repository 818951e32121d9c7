import { bodyLimit } from 'hono/body-limit';
import type { z } from 'zod';
import { ID_PARAM, NO_QUERY } from './openapi.ts';
import { Problem } from './problems.ts';

/** Bytes of a JSON body. */
const JSON_LIMIT = 1e6;

/** Middleware of every route that takes JSON. */
const limitJson = bodyLimit({
  maxSize: JSON_LIMIT,
  onError: () => {
    throw new Problem('too-large', `the body has more than ${JSON_LIMIT} bytes`);
  },
});

const bodyOf = <S extends z.ZodType>(schema: S) =>
  ({ required: true, content: { 'application/json': { schema } } }) as const;

/** What a route to one thing by its id says of the JSON that it takes. */
export const jsonById = <S extends z.ZodType, Q extends z.ZodObject = typeof NO_QUERY>(schema: S, query?: Q) => ({
  middleware: limitJson,
  request: { params: ID_PARAM, query: (query ?? NO_QUERY) as Q, body: bodyOf(schema) },
});

/** The same for a route to a whole collection. */
export const jsonToList = <S extends z.ZodType>(schema: S) => ({
  middleware: limitJson,
  request: { query: NO_QUERY, body: bodyOf(schema) },
});
