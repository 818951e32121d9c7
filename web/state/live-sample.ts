import type { GapRow } from '../../schema/wire/campaign.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { loadCurves, loadParameters, loadTable } from '../client/campaigns.ts';
import { Problem } from '../client/request.ts';
import type { FlagRow, InstrumentRow, ScanRow, Status, StatusSample } from '../client/rows.ts';
import type { CurveKind, Curves } from '../model/curves.ts';
import { openLivePage } from './live-page.ts';

/** Kinds of curves the server gives of a sample. */
const KINDS: CurveKind[] = ['thermogram', 'baseline', 'conversion', 'kissinger', 'energy'];

export interface SampleData {
  sample: StatusSample;
  scans: ScanRow[];
  flags: FlagRow[];
  gaps: GapRow[];
  parameters: ParameterRow[];
  instruments: InstrumentRow[];
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
    const [scans, flags, gaps, instruments, parameters, ...curves] = await Promise.all([
      loadTable(campaignId, 'scans', filter, signal),
      loadTable(campaignId, 'flags', filter, signal),
      loadTable(campaignId, 'gaps', filter, signal),
      loadTable(campaignId, 'instruments', {}, signal),
      loadParameters(campaignId, filter, signal),
      ...KINDS.map((kind) => loadCurves(sample.id, kind, signal)),
    ]);
    const byKind = Object.fromEntries(curves.map((c) => [c.kind, c]));
    return { sample, scans, flags, gaps, instruments, parameters, curves: byKind };
  });
