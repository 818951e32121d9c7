import type { Cell, ResultTable } from '../../../schema/wire/result-tables.ts';
import type { Ports } from '../../ports/index.ts';

export type ResultRow = Record<string, Cell>;

export interface TableFilter {
  sample?: string;
  /** `parameters` only */
  quantity?: string;
  method?: string;
  event?: number;
  /** Rows to skip and to give: the order is fixed, so an offset is a position. */
  offset?: number;
  limit?: number;
}

/**
 * The rows of a result table in their fixed order, keyed by the column names of RESULT_TABLES; missing is null, `rates` and `flags` are arrays.
 * `conversion` reads the stored curves one scan at a time.
 */
export async function* readTable(
  _ports: Pick<Ports, 'database' | 'blobs'>,
  _campaignId: string,
  _table: ResultTable,
  _filter: TableFilter = {},
): AsyncGenerator<ResultRow> {
  yield* [];
  throw new Error('not written yet');
}
