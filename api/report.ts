import type { Ports } from '../jobs/ports/index.ts';
import { answerProvenance, type Provenance } from '../jobs/steps/answer-provenance.ts';
import { type Campaign, campaignStatus, listSamples, type ResultRow, readCurrentTable } from '../jobs/store/index.ts';
import { RESULT_TABLES, type ResultTable } from '../schema/wire/result-tables.ts';
import type { SampleState } from '../schema/wire/states.ts';
import { type ReportData, renderReport } from '../web/report/index.tsx';
import { readCurves } from './sample-curves.ts';
import { CURVE_KINDS, type CurveKind, type Curves } from './shapes/curves.ts';
import { VERSION } from './version.ts';

/** All that a report says: tables keyed as the CSV files key them, curves as their route gives them. */
interface ReportContent {
  campaign: string;
  tables: Record<Exclude<ResultTable, 'conversion'>, ResultRow[]>;
  samples: { sample: string; state: SampleState; reason?: string; curves: Partial<Record<CurveKind, Curves>> }[];
  provenance: Provenance & { version: string };
}

/** The conversion table is in the curves already. */
const TABLES = (Object.keys(RESULT_TABLES) as ResultTable[]).filter((table) => table !== 'conversion');

/** Gathers what the report of a campaign shows. A kind of curve that a sample has none of is left out. */
async function gatherReport(ports: Ports, campaign: Campaign): Promise<ReportContent> {
  const tables = {} as ReportContent['tables'];
  for (const table of TABLES) {
    tables[table] = [];
    for await (const row of readCurrentTable(ports, campaign.id, table)) tables[table].push(row);
  }
  const { samples: states } = await campaignStatus(ports, campaign.id);
  const samples: ReportContent['samples'] = [];
  for (const sample of await listSamples(ports, campaign.id)) {
    const { state, reason } = states.find((one) => one.sample === sample.sample) ?? sample;
    const curves: Partial<Record<CurveKind, Curves>> = {};
    for (const kind of CURVE_KINDS) {
      const found = await readCurves(ports, sample, kind);
      if (found.series.length > 0) curves[kind] = found;
    }
    samples.push({ sample: sample.sample, state, ...(reason && { reason }), curves });
  }
  return {
    campaign: campaign.name,
    tables,
    samples,
    provenance: { version: VERSION, ...(await answerProvenance(ports, campaign.id)) },
  };
}

/** The report of a campaign as one page of HTML. The same state of a campaign gives the same bytes. */
export async function writeReport(ports: Ports, campaign: Campaign): Promise<string> {
  // The columns of every table are those of the row types: a test of each table holds that.
  return renderReport((await gatherReport(ports, campaign)) as unknown as ReportData);
}
