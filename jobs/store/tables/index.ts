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
  const { offset = 0, limit = Number.POSITIVE_INFINITY } = filter;
  let position = 0;
  if (limit <= 0) return;
  for await (const row of await rowsOf(ports, campaignId, table, filter)) {
    if (position++ < offset) continue;
    yield row;
    if (position >= offset + limit) return;
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

async function rowsOf(
  ports: Ports,
  campaignId: string,
  table: ResultTable,
  filter: TableFilter,
): Promise<Iterable<ResultRow> | AsyncIterable<ResultRow>> {
  const { sample } = filter;
  switch (table) {
    case 'parameters':
      return readParameterTable(ports, campaignId, filter);
    case 'scans':
      return readScanTable(ports, campaignId, sample);
    case 'conversion':
      return readConversionTable(ports, campaignId, sample);
    case 'instruments':
      return readInstrumentTable(ports, campaignId);
    case 'verdicts':
    case 'forecasts':
    case 'advice':
      return readBodies(ports, campaignId, table, sample);
    case 'coverage':
    case 'gaps':
      return readPlanTable(ports, campaignId, table, sample);
    case 'flags':
      return (await readFlagTable(ports, campaignId)).filter((row) => sample === undefined || row.sample === sample);
  }
}
