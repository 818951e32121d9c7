import type { ResultTable } from '../../../schema/wire/result-tables.ts';
import type { Ports } from '../../ports/index.ts';
import { readBodies } from './body-tables.ts';
import { readConversionTable } from './conversion-table.ts';
import { readFlagTable } from './flag-table.ts';
import { readInstrumentTable, readParameterTable, readPlanTable } from './parameter-table.ts';
import type { ResultRow, TableFilter } from './result-row.ts';
import { readScanTable } from './scan-table.ts';

export type { ResultRow, TableFilter } from './result-row.ts';

/**
 * The rows of a result table in their fixed order, keyed by the column names of RESULT_TABLES; missing is null, `rates` and `flags` are arrays.
 * `conversion` reads the stored curves one scan at a time.
 */
export async function* readTable(
  ports: Ports,
  campaignId: string,
  table: ResultTable,
  filter: TableFilter = {},
): AsyncGenerator<ResultRow> {
  const { limit = Number.POSITIVE_INFINITY } = filter;
  if (limit <= 0) return;
  let given = 0;
  for await (const row of rowsFrom(ports, campaignId, table, filter)) {
    yield row;
    if (++given >= limit) return;
  }
}

/** A table as the result files have it, of what is there now: scans of files that were replaced or are gone are left out. */
export async function* readCurrentTable(
  ports: Ports,
  campaignId: string,
  table: ResultTable,
): AsyncGenerator<ResultRow> {
  for await (const row of readTable(ports, campaignId, table))
    if (table !== 'scans' || row.status !== 'superseded') yield row;
}

type Rows = Iterable<ResultRow> | AsyncIterable<ResultRow>;

/** From position `offset` on. */
function rowsFrom(ports: Ports, campaignId: string, table: ResultTable, filter: TableFilter): Rows {
  switch (table) {
    case 'parameters':
      return readParameterTable(ports, campaignId, filter);
    case 'verdicts':
    case 'forecasts':
    case 'advice':
      return readBodies(ports, campaignId, table, filter);
    default:
      return skipRows(otherTable(ports, campaignId, table, filter.sample), filter.offset);
  }
}

type OtherTable = Exclude<ResultTable, 'parameters' | 'verdicts' | 'forecasts' | 'advice'>;

async function otherTable(
  ports: Ports,
  campaignId: string,
  table: OtherTable,
  sample: string | undefined,
): Promise<Rows> {
  switch (table) {
    case 'scans':
      return readScanTable(ports, campaignId, sample);
    case 'conversion':
      return readConversionTable(ports, campaignId, sample);
    case 'instruments':
      return readInstrumentTable(ports, campaignId);
    case 'coverage':
    case 'gaps':
      return readPlanTable(ports, campaignId, table, sample);
    case 'flags':
      return (await readFlagTable(ports, campaignId)).filter((row) => sample === undefined || row.sample === sample);
  }
}

async function* skipRows(rows: Promise<Rows>, offset = 0): AsyncGenerator<ResultRow> {
  let position = 0;
  for await (const row of await rows) if (position++ >= offset) yield row;
}
