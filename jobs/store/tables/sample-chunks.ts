import { and, asc, count, gte, lte, type SQL } from 'drizzle-orm';
import type { advice, forecasts, parameters, verdicts } from '../../../schema/tables/index.ts';
import type { Ports } from '../../ports/index.ts';

/** Rows in memory at a time, about: whole samples are read until they are at least as many. */
const CHUNK = 2000;

type SampleTable = typeof advice | typeof forecasts | typeof parameters | typeof verdicts;

/**
 * Conditions that together give the rows of `where` once, by sample, some thousand rows each: a table of a large campaign does
 * not fit into memory. Samples whose rows all lie before position `offset` are left out; `skip` counts the others before it.
 */
export async function* sampleChunks(
  { database }: Pick<Ports, 'database'>,
  table: SampleTable,
  where: SQL | undefined,
  offset = 0,
): AsyncGenerator<{ of: SQL | undefined; skip: number }> {
  const samples = await database.read
    .select({ sample: table.sample, rows: count() })
    .from(table)
    .where(where)
    .groupBy(table.sample)
    .orderBy(asc(table.sample));
  let before = 0;
  let first: string | undefined;
  let gathered = 0;
  for (const [i, { sample, rows }] of samples.entries()) {
    if (first === undefined && before + rows <= offset) {
      before += rows;
      continue;
    }
    first ??= sample;
    gathered += rows;
    if (gathered < CHUNK && i < samples.length - 1) continue;
    yield { of: and(where, gte(table.sample, first), lte(table.sample, sample)), skip: Math.max(0, offset - before) };
    before += gathered;
    first = undefined;
    gathered = 0;
  }
}
