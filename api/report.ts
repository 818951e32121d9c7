import type { Ports } from '../jobs/ports/index.ts';
import { answerProvenance } from '../jobs/steps/answer-provenance.ts';
import { type Campaign, campaignStatus, listSamples, type ResultRow, readCurrentTable } from '../jobs/store/index.ts';
import { RESULT_TABLES, type ResultTable } from '../schema/wire/result-tables.ts';
import { figuredSamples, type ReportData, type ReportSample, renderReport } from '../web/report/index.tsx';
import { readEveryCurve } from './sample-curves.ts';
import { VERSION } from './version.ts';

type Tables = Record<Exclude<ResultTable, 'conversion'>, ResultRow[]>;

/** The conversion table is in the curves already; parameters come once it is known whose curves are told. */
const TABLES = (Object.keys(RESULT_TABLES) as ResultTable[]).filter(
  (table) => table !== 'conversion' && table !== 'parameters',
);

/** Tables as the CSV files key them; of samples without figures only what is told of them. */
async function gatherTables(ports: Ports, campaignId: string, samples: readonly ReportSample[]) {
  const rows = { parameters: [] } as unknown as Tables;
  for (const table of TABLES) {
    rows[table as keyof Tables] = [];
    for await (const row of readCurrentTable(ports, campaignId, table)) rows[table as keyof Tables].push(row);
  }
  // The columns of every table are those of the row types: a test of each table holds that.
  const tables = rows as unknown as Required<ReportData['tables']>;
  const figured = figuredSamples(samples, tables.flags, tables.verdicts);
  for await (const row of readCurrentTable(ports, campaignId, 'parameters'))
    if (row.conversion === null || figured.has(String(row.sample))) rows.parameters.push(row);
  return { tables, figured };
}

/**
 * The report of a campaign as one page of HTML, in pieces. The same state of a campaign gives the same bytes. A kind of curve that a
 * sample has none of is left out.
 */
export async function* writeReport(ports: Ports, campaign: Campaign): AsyncGenerator<string, void, undefined> {
  const { samples: states } = await campaignStatus(ports, campaign.id);
  const stateOf = new Map(states.map((state) => [state.sample, state]));
  const views = new Map((await listSamples(ports, campaign.id)).map((view) => [view.sample, view]));
  const samples = [...views.values()].map((view): ReportSample => {
    const { state, reason } = stateOf.get(view.sample) ?? view;
    return { sample: view.sample, state, ...(reason && { reason }) };
  });
  const { tables, figured } = await gatherTables(ports, campaign.id, samples);
  const provenance = { version: VERSION, ...(await answerProvenance(ports, campaign.id)) };
  yield* renderReport({ campaign: campaign.name, tables, samples, provenance }, figured, async ({ sample }, own) => {
    const view = views.get(sample);
    return view ? readEveryCurve(ports, view, own as unknown as Pick<Tables, 'scans' | 'parameters'>) : {};
  });
}
