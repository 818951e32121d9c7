import { HEADLINES } from '../../schema/wire/parameters.ts';
import { loadParameters, loadTable, type TableRows } from '../client/campaigns.ts';
import type { Status } from '../client/rows.ts';
import { openLivePage } from './live-page.ts';

export type Tables = { [Table in Exclude<keyof TableRows, 'verdicts' | 'forecasts'>]: TableRows[Table][] };

/** Every table of the page; those of a small campaign come with the overview. */
async function loadTables(id: string, signal: AbortSignal): Promise<Tables> {
  const of = <Table extends keyof Tables>(table: Table) => loadTable(id, table, {}, signal);
  const [scans, coverage, gaps, flags, instruments, advice, ...parameters] = await Promise.all([
    of('scans'),
    of('coverage'),
    of('gaps'),
    of('flags'),
    of('instruments'),
    of('advice'),
    ...HEADLINES.map((filter) => loadParameters(id, filter, signal)),
  ]);
  return { scans, coverage, gaps, flags, instruments, advice, parameters: parameters.flat() };
}

const NO_ROWS: Tables = { scans: [], coverage: [], gaps: [], flags: [], instruments: [], advice: [], parameters: [] };

export const openCampaign = (id: string) =>
  openLivePage<Tables>(id, (_: Status, signal) => loadTables(id, signal), {
    show: ({ tables }) => ({ ...NO_ROWS, ...tables }),
    hasMore: ({ is_whole: isWhole }) => !isWhole,
  });
