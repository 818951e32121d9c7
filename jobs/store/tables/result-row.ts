import type { Cell } from '../../../schema/wire/result-tables.ts';

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
