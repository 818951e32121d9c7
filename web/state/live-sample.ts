import type { GapRow } from '../../schema/wire/campaign.ts';
import { CURVE_KINDS, type CurveKind } from '../../schema/wire/curve-kinds.ts';
import type { AdviceRow, ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import { loadCurves, loadParameters, loadSample, loadTable, type TableRows } from '../client/campaigns.ts';
import type { Overview } from '../client/overview.ts';
import { Problem } from '../client/request.ts';
import type { FlagRow, InstrumentRow, SampleView, ScanRow, Status, StatusSample } from '../client/rows.ts';
import type { Curves } from '../model/curves.ts';
import { openLivePage } from './live-page.ts';

export interface SampleData {
  sample: StatusSample;
  scans: ScanRow[];
  instruments: InstrumentRow[];
  verdicts: VerdictRow[];
  /** Every scan with its id, those without curves too */
  listed: SampleView['scans'];
  /** Outlines at first */
  curves: Partial<Record<CurveKind, Curves>>;
  /** What stands further down the page, and comes later */
  below?: {
    flags: FlagRow[];
    gaps: GapRow[];
    parameters: ParameterRow[];
    forecasts: ForecastRow[];
    advice: AdviceRow[];
  };
}

const findSample = (status: Status, name: string): StatusSample | undefined =>
  status.samples.find((s) => s.sample === name) ?? status.samples.find((s) => s.id === name);

async function loadAll(campaignId: string, name: string, status: Status, signal: AbortSignal): Promise<SampleData> {
  const sample = findSample(status, name);
  if (!sample) {
    throw new Problem(
      404,
      'No such sample',
      `The campaign has no sample «${name}».`,
      'Go back to the campaign: its map lists every sample.',
    );
  }
  const filter = { sample: sample.sample };
  const load = <Table extends keyof TableRows>(table: Table) => loadTable(campaignId, table, filter, signal);
  const [scans, { scans: listed }, verdicts, instruments, flags, gaps, forecasts, advice, parameters, ...curves] =
    await Promise.all([
      load('scans'),
      loadSample(sample.id, signal),
      load('verdicts'),
      loadTable(campaignId, 'instruments', {}, signal),
      load('flags'),
      load('gaps'),
      load('forecasts'),
      load('advice'),
      loadParameters(campaignId, filter, signal),
      ...CURVE_KINDS.map((kind) => loadCurves(sample.id, kind, signal)),
    ]);
  const below = { flags, gaps, parameters, forecasts, advice };
  const byKind = Object.fromEntries(curves.map((c) => [c.kind, c]));
  return { sample, listed, scans, verdicts, instruments, curves: byKind, below };
}

/** What the overview has of a sample; undefined where the campaign has no such sample. */
function firstData({ status, tables, scans, outlines }: Overview, name: string): SampleData | undefined {
  const sample = findSample(status, name);
  const { scans: rows = [], verdicts = [], instruments = [] } = tables;
  const curves = Object.fromEntries((outlines ?? []).map((c) => [c.kind, c]));
  return sample && { sample, listed: scans ?? [], scans: rows, verdicts, instruments, curves };
}

/** Opens the page of one sample, named by its name or its id. */
export const openSample = (campaignId: string, name: string) =>
  openLivePage<SampleData>(campaignId, (status, signal) => loadAll(campaignId, name, status, signal), {
    sample: name,
    show: (overview) => firstData(overview, name),
    hasMore: () => true,
  });
