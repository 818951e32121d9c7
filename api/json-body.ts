import { bodyLimit } from 'hono/body-limit';
import { Problem } from './problems.ts';

/** Bytes of a JSON body. */
const JSON_LIMIT = 1e6;

/** Middleware of every route that takes JSON. */
export const limitJson = bodyLimit({
  maxSize: JSON_LIMIT,
  onError: () => {
    throw new Problem('too-large', `the body has more than ${JSON_LIMIT} bytes`);
  },
});
