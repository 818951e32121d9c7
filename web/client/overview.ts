import type { CoverageRow, GapRow } from '../../schema/wire/campaign.ts';
import type { AdviceRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import type { Curves } from '../model/curves.ts';
import type { Route } from '../routes.ts';
import { askAhead, firstPage, requestJson } from './request.ts';
import type { Campaign, FlagRow, InstrumentRow, SampleView, ScanRow, Status } from './rows.ts';

/** What a page shows first. */
export interface Overview {
  campaign: Campaign;
  status: Status;
  /** Names this state to the event stream */
  state: string;
  tables: {
    scans?: ScanRow[];
    coverage?: CoverageRow[];
    gaps?: GapRow[];
    flags?: FlagRow[];
    parameters?: ParameterRow[];
    instruments?: InstrumentRow[];
    verdicts?: VerdictRow[];
    advice?: AdviceRow[];
  };
  /** Whether the tables have no more rows */
  is_whole: boolean;
  scans?: SampleView['scans'];
  outlines?: Curves[];
}

const overviewRoute = (id: string, sample: string | undefined): string =>
  `/campaigns/${encodeURIComponent(id)}/overview${sample === undefined ? '' : `?${new URLSearchParams({ sample })}`}`;

/** What a page of a campaign, or of one sample of it, shows first. */
export const loadOverview = (id: string, sample: string | undefined, signal?: AbortSignal): Promise<Overview> =>
  requestJson(overviewRoute(id, sample), signal);

/** Asks for what the page at this address shows first. Resolves when it is there, or refused. */
export async function askForPage(route: Route): Promise<void> {
  if (route.view === 'campaigns') await askAhead(firstPage('/campaigns'));
  else if (route.view === 'campaign') await askAhead(overviewRoute(route.id, undefined));
  else if (route.view === 'sample') await askAhead(overviewRoute(route.id, route.sample));
}
