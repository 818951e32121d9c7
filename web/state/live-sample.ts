import type { GapRow } from '../../schema/wire/campaign.ts';
import type { AdviceRow, ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import { loadCurves, loadParameters, loadSample, loadTable, type TableRows } from '../client/campaigns.ts';
import { Problem } from '../client/request.ts';
import type { FlagRow, InstrumentRow, SampleView, ScanRow, Status, StatusSample } from '../client/rows.ts';
import type { CurveKind, Curves } from '../model/curves.ts';
import { openLivePage } from './live-page.ts';

/** Kinds of curves shown below the thermograms. */
const LATER_KINDS: CurveKind[] = ['conversion', 'kissinger', 'energy', 'local_energy', 'growth', 'viscosity', 'ttt', 'constant_heating'];

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
  openLivePage(campaignId, async (status: Status, signal, showPart): Promise<SampleData> => {
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
    const load = <Table extends keyof TableRows>(table: Table) => loadTable(campaignId, table, filter, signal);
    // First what the top of the page shows; a browser sends a few requests at a time, in this order.
    const early = Promise.all([
      loadCurves(sample.id, 'thermogram', signal),
      loadCurves(sample.id, 'baseline', signal),
      load('scans'),
      loadSample(sample.id, signal),
      load('verdicts'),
    ]).then(([thermogram, baseline, scans, listed, verdicts]) => {
      const rest = { flags: [], gaps: [], parameters: [], instruments: [], forecasts: [], advice: [] };
      const part = { sample, listed: listed.scans, scans, verdicts, curves: { thermogram, baseline } };
      showPart({ ...part, ...rest });
      return part;
    });
    const [part, flags, gaps, forecasts, advice, instruments, parameters, ...curves] = await Promise.all([
      early,
      load('flags'),
      load('gaps'),
      load('forecasts'),
      load('advice'),
      loadTable(campaignId, 'instruments', {}, signal),
      loadParameters(campaignId, filter, signal),
      ...LATER_KINDS.map((kind) => loadCurves(sample.id, kind, signal)),
    ]);
    const later = Object.fromEntries(curves.map((c) => [c.kind, c]));
    const tables = { flags, gaps, forecasts, advice, instruments, parameters };
    return { ...part, ...tables, curves: { ...part.curves, ...later } };
  });
