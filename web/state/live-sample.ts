import type { GapRow } from '../../schema/wire/campaign.ts';
import type { AdviceRow, ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import { loadCurves, loadParameters, loadSample, loadTable } from '../client/campaigns.ts';
import { Problem } from '../client/request.ts';
import type { FlagRow, InstrumentRow, SampleView, ScanRow, Status, StatusSample } from '../client/rows.ts';
import type { CurveKind, Curves } from '../model/curves.ts';
import { openLivePage } from './live-page.ts';

/** Kinds of curves the server gives of a sample. */
const KINDS: CurveKind[] = [
  'thermogram',
  'baseline',
  'conversion',
  'kissinger',
  'energy',
  'growth',
  'viscosity',
  'ttt',
];

export interface SampleData {
  sample: StatusSample;
  scans: ScanRow[];
  flags: FlagRow[];
  gaps: GapRow[];
  parameters: ParameterRow[];
  instruments: InstrumentRow[];
  verdicts: VerdictRow[];
  forecasts: ForecastRow[];
  advice: AdviceRow[];
  /** Every scan with its id, those without curves too */
  listed: SampleView['scans'];
  curves: Partial<Record<CurveKind, Curves>>;
}

/** Opens the page of one sample, named by its name or its id. */
export const openSample = (campaignId: string, name: string) =>
  openLivePage(campaignId, async (status: Status, signal): Promise<SampleData> => {
    const sample = status.samples.find((s) => s.sample === name) ?? status.samples.find((s) => s.id === name);
    if (!sample) {
      throw new Problem(
        404,
        'No such sample',
        `The campaign has no sample «${name}».`,
        'Go back to the campaign: its map lists every sample.',
      );
    }
    const filter = { sample: sample.sample };
    const [listed, scans, flags, gaps, verdicts, forecasts, advice, instruments, parameters, ...curves] =
      await Promise.all([
        loadSample(sample.id, signal),
        loadTable(campaignId, 'scans', filter, signal),
        loadTable(campaignId, 'flags', filter, signal),
        loadTable(campaignId, 'gaps', filter, signal),
        loadTable(campaignId, 'verdicts', filter, signal),
        loadTable(campaignId, 'forecasts', filter, signal),
        loadTable(campaignId, 'advice', filter, signal),
        loadTable(campaignId, 'instruments', {}, signal),
        loadParameters(campaignId, filter, signal),
        ...KINDS.map((kind) => loadCurves(sample.id, kind, signal)),
      ]);
    const byKind = Object.fromEntries(curves.map((c) => [c.kind, c]));
    const tables = { scans, flags, gaps, verdicts, forecasts, advice, instruments, parameters };
    return { sample, listed: listed.scans, ...tables, curves: byKind };
  });
