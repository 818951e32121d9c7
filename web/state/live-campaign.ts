import { loadParameters, loadTable, type TableRows } from '../client/campaigns.ts';
import type { Status } from '../client/rows.ts';
import { openLivePage } from './live-page.ts';

export type Tables = { [Table in Exclude<keyof TableRows, 'verdicts' | 'forecasts'>]: TableRows[Table][] };

/** What the map's margin shows of the parameters; a sample's other numbers are loaded where they are shown. */
const HEADLINES = [
  { quantity: 'activation_energy', method: 'vyazovkin' },
  { quantity: 'activation_energy', method: 'kissinger' },
  { quantity: 'avrami_exponent' },
];

export const openCampaign = (id: string) =>
  openLivePage(id, async (_: Status, signal): Promise<Tables> => {
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
  });
