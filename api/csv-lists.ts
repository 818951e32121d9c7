import { z } from '@hono/zod-openapi';
import type { Context } from 'hono';
import type { ApiEnv } from './access.ts';
import { csvStream } from './csv-stream.ts';
import { ID_PARAM, MAX_LIMIT, oneOf, strict } from './openapi.ts';

/** How every list of the API stands in CSV, for the document. */
export const CSV_RULE =
  'Every route that gives a list takes `?format=csv`: the columns are the keys of the JSON; an object becomes columns `key.field`, a list of plain values one cell joined by `;`, any other list JSON in one cell; missing is empty.';

/** Query of a route that gives a list. @param what the list, e.g. `its scans` */
export const formatQuery = (what: string) => ({
  format: oneOf(['json', 'csv'])
    .default('json')
    .openapi({ description: `\`csv\` gives ${what}.` }),
});

/** Request that names one thing by its id and may ask for its list as CSV. */
export const byIdOrCsv = (what: string) => ({ params: ID_PARAM, query: strict(formatQuery(what)) });

/** Answers of a route, with CSV beside the JSON. */
export const orCsv = <A extends { 200: Body } | { 202: Body }>(answers: A): A => {
  const csv = { 'text/csv': { schema: z.string() } };
  const of = ({ content, ...rest }: Body) => ({ ...rest, content: { ...content, ...csv } });
  return Object.fromEntries(
    Object.entries(answers).map(([status, answer]) => [status, /^20[02]$/.test(status) ? of(answer as Body) : answer]),
  ) as A;
};
type Body = { description: string; content: object };

/** Keys of the items of a list as columns, in their order; those of an object within as `key.field`. */
export function columnsOf(item: z.ZodType, before = ''): string[] {
  if (!(item instanceof z.ZodObject)) return [before.slice(0, -1)];
  return Object.entries(item.shape).flatMap(([key, field]) => columnsOf(bare(field as z.ZodType), `${before}${key}.`));
}

const bare = (field: z.ZodType): z.ZodType =>
  field instanceof z.ZodOptional || field instanceof z.ZodNullable ? bare(field.unwrap() as z.ZodType) : field;

/** The CSV of a list. Never, since the typed answers of a route know JSON alone. */
export const answerCsv = (
  c: Context<ApiEnv>,
  name: string,
  columns: readonly string[],
  rows: AsyncIterable<unknown> | Iterable<unknown>,
  status: 200 | 202 = 200,
): never =>
  c.body(csvStream(columns, rows), status, {
    'content-type': 'text/csv; charset=utf-8; header=present',
    'content-disposition': `attachment; filename="${name}.csv"`,
  }) as never;

/** Every item of a list that is read in pages, whatever page was asked for. */
export async function* everyItem<Row extends { id: string }, Item>(
  load: (page: { limit: number; after?: string }) => Promise<Row[]>,
  itemOf: (row: Row) => Item,
): AsyncGenerator<Item> {
  let after: string | undefined;
  for (;;) {
    const rows = await load({ limit: MAX_LIMIT, after });
    for (const row of rows) yield itemOf(row);
    if (rows.length < MAX_LIMIT) return;
    after = rows[rows.length - 1].id;
  }
}
