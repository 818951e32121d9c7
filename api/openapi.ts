import { OpenAPIHono, z } from '@hono/zod-openapi';
import type { ZodRawShape } from 'zod';
import { quote } from '../schema/wire/flags.ts';
import type { ApiEnv } from './access.ts';
import { Problem } from './problems.ts';

export type ApiApp = OpenAPIHono<ApiEnv>;

type Issue = { code?: string; path: PropertyKey[]; message: string; keys?: string[] };

/** «value» of a refused field, or `missing`. */
function valueAt(data: unknown, path: PropertyKey[]): string {
  let value = data;
  for (const key of path) value = (value as Record<PropertyKey, unknown> | undefined)?.[key];
  if (value === undefined) return 'missing';
  return quote(typeof value === 'string' ? value : JSON.stringify(value));
}

/** One sentence an issue. Schemas of requests word their `error` so that it reads after "allowed: ". */
function describeIssue(issue: Issue, data: unknown): { field?: string; text: string } {
  if (issue.code === 'unrecognized_keys')
    return { field: issue.keys?.[0], text: `${issue.keys?.map(quote).join(', ')} is not known; ${issue.message}` };
  const field = issue.path.map(String).join('.');
  if (field === '') return { text: `the value is ${valueAt(data, [])}; allowed: ${issue.message}` };
  return { field, text: `${field} is ${valueAt(data, issue.path)}; allowed: ${issue.message}` };
}

const TARGETS: Record<string, string> = { json: 'body', query: 'query', param: 'path', header: 'header' };

/** What every validator calls: refuses with 422 and names each field, its value and what is allowed. */
export function refuseInvalid(result: {
  target: string;
  success: boolean;
  error?: { issues: Issue[] };
  data?: unknown;
}): undefined {
  if (result.success) return undefined;
  const issues = (result.error?.issues ?? []).map((issue) => describeIssue(issue, result.data));
  throw new Problem('invalid-input', `${TARGETS[result.target]}: ${issues.map((i) => i.text).join('; ')}`, {
    field: issues[0]?.field,
  });
}

export function createRouter(): ApiApp {
  return new OpenAPIHono<ApiEnv>({ defaultHook: refuseInvalid });
}

/** An object that refuses what it does not know and says what it does know. For queries and bodies of requests. */
export function strict<S extends ZodRawShape>(shape: S) {
  const known = Object.keys(shape);
  return z.strictObject(shape, {
    error: (issue) => {
      if (issue.code === 'unrecognized_keys') return known.length ? `known: ${known.join(', ')}` : 'none is known here';
      return known.length ? `an object with ${known.join(', ')}` : 'an empty object';
    },
  });
}

/** Text from 1 to `max` characters. */
export const textOf = (max: number) => {
  const error = `text of 1 to ${max} characters`;
  return z.string({ error }).min(1, { error }).max(max, { error });
};

/** One of a closed list. */
export const oneOf = <const T extends readonly [string, ...string[]]>(values: T) =>
  z.enum(values, { error: `one of ${values.join(', ')}` });

export const NO_QUERY = strict({});

export const DEFAULT_LIMIT = 100;
export const MAX_LIMIT = 1000;
const limitError = `a whole number from 1 to ${MAX_LIMIT}`;

/** Query of every list. */
export const PAGE_QUERY = {
  limit: z.coerce
    .number({ error: limitError })
    .int({ error: limitError })
    .min(1, { error: limitError })
    .max(MAX_LIMIT, { error: limitError })
    .default(DEFAULT_LIMIT)
    .openapi({ description: 'How many items at most.' }),
  after: textOf(200).optional().openapi({ description: 'The `next` of the page before.' }),
};

export const ID_PARAM = z.object({ id: textOf(200) });

/** Request that names one thing by its id and says nothing else. */
export const BY_ID = { params: ID_PARAM, query: NO_QUERY };

export const ProblemShape = z
  .object({
    type: z.string(),
    title: z.string(),
    status: z.number().int(),
    detail: z.string(),
    action: z.string(),
    field: z.string().optional(),
    file: z.string().optional(),
    line: z.number().int().optional(),
  })
  .openapi('Problem');

/** Stands under `default` of every route: any other answer is a problem. */
export const PROBLEM_ANSWER = {
  description: 'A problem (RFC 9457).',
  content: { 'application/problem+json': { schema: ProblemShape } },
} as const;

/** JSON answer of a route. */
export const answer = <S extends z.ZodType>(schema: S, description: string) => ({
  description,
  content: { 'application/json': { schema } },
});

/** Answers of a route that gives JSON under one status. */
export const answersOf = <N extends 200 | 201 | 202, S extends z.ZodType>(status: N, schema: S, description: string) =>
  ({ [status]: answer(schema, description), default: PROBLEM_ANSWER }) as Record<N, ReturnType<typeof answer<S>>> & {
    default: typeof PROBLEM_ANSWER;
  };

/** Answer of a route that gives something else than JSON. */
export const bodyOf = <T extends string>(type: T, description: string) => ({
  description,
  content: { [type]: { schema: z.string() } } as Record<T, { schema: z.ZodString }>,
});

/** `{items, next}`. */
export const listOf = <S extends z.ZodType>(item: S) => z.object({ items: z.array(item), next: z.string().nullable() });
