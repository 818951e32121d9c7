import { useEffect, useMemo } from 'preact/hooks';
import type { GapRow } from '../../schema/wire/campaign.ts';
import type { Campaign, FlagRow, Status } from '../client/rows.ts';
import { instrumentNames, type LedgerRow, ledgerSteps } from '../model/ledger.ts';
import { tellableNow } from '../model/next-steps.ts';
import { jobsPath } from '../routes.ts';
import { openCampaign, type Tables } from '../state/live-campaign.ts';
import { createUploads } from '../state/uploads.ts';
import { WholeDownloads } from './download.tsx';
import { FileDesk, Outcomes } from './file-desk.tsx';
import { InstrumentTable } from './instrument-table.tsx';
import { Ledger } from './ledger.tsx';
import { NextSteps } from './next-steps.tsx';
import { ProblemNotice } from './notice.tsx';
import { Numbers } from './numbers.tsx';
import { Progress } from './progress.tsx';
import { useParts } from './use-parts.ts';
import { useSteps } from './use-steps.ts';

const NOTHING: readonly LedgerRow[] = [];

/** One campaign: where it stands, the coverage map, what to do next, the numbers, the instruments. */
export function CampaignView({ id }: { id: string }) {
  const live = useMemo(() => openCampaign(id), [id]);
  const uploads = useMemo(() => createUploads(id), [id]);
  useEffect(() => () => live.close(), [live]);

  const campaign = live.campaign.value;
  const status = live.status.value;
  const tables = live.data.value;
  const problem = live.problem.value;
  useEffect(() => {
    document.title = `${campaign?.name ?? 'Campaign'} – ratespan`;
  }, [campaign?.name]);

  const told = useMemo(() => tellableNow(tables?.flags ?? [], tables?.gaps ?? [], status), [tables, status]);
  const built = useSteps(
    () => (tables ? ledgerSteps({ ...tables, gaps: told.gaps }, status) : undefined),
    [tables, told, status],
  );
  const rows = built ?? NOTHING;
  const names = useMemo(
    () => instrumentNames(rows, tables?.instruments.map((row) => row.instrument) ?? []),
    [rows, tables],
  );
  const instruments = useMemo(() => names, [names.join('\u0000')]);

  if (!campaign) {
    return problem ? (
      <>
        <ProblemNotice problem={problem} isPage />
        <p>
          <a href="/">All campaigns</a>
        </p>
      </>
    ) : (
      <h1 class="waiting">Loading the campaign…</h1>
    );
  }
  const isEmpty = tables !== undefined && built?.length === 0 && tables.scans.length === 0;
  // Where the buttons stand depends on whether there is anything: moved later they would lose the keyboard's focus.
  const hasPlace = built !== undefined || problem !== undefined;
  return (
    <>
      <div class="campaign-head">
        <div class="campaign-title">
          <h1>{campaign.name}</h1>
          {hasPlace && !isEmpty && <FileDesk uploads={uploads} isEmpty={false} />}
        </div>
        {status && !isEmpty && <WholeDownloads campaign={campaign} />}
        {status && <Progress status={status} link={live.link.value} jobsHref={jobsPath(campaign.id)} />}
      </div>
      {problem && <ProblemNotice problem={problem} />}
      {isEmpty && <FileDesk uploads={uploads} isEmpty />}
      <Outcomes uploads={uploads} />
      {!built && !problem && <p class="waiting">Loading the tables…</p>}
      {tables && built && !isEmpty && (
        <Body campaign={campaign} tables={tables} rows={rows} told={told} instruments={instruments} status={status} />
      )}
    </>
  );
}

/** What stands below the head of a campaign that has files. */
function Body(props: {
  campaign: Campaign;
  tables: Tables;
  rows: readonly LedgerRow[];
  told: { flags: FlagRow[]; gaps: GapRow[] };
  instruments: readonly string[];
  status: Status | undefined;
}) {
  const { campaign, tables, rows, told, instruments, status } = props;
  const drawn = useParts(4);
  const numbered = rows.filter((row) => row.numbers.length > 0).map((row) => row.sample);
  const unassigned = tables.scans.filter((scan) => scan.status === 'unassigned');
  return (
    <>
      <Ledger campaign={campaign} rows={rows} instruments={instruments} unassigned={unassigned} />
      {drawn > 1 && (
        <NextSteps
          campaign={campaign}
          flags={told.flags}
          gaps={told.gaps}
          advice={tables.advice}
          isSettled={status?.settled ?? false}
        />
      )}
      {drawn > 2 && <Numbers campaign={campaign} samples={numbered} revision={tables} />}
      {drawn > 3 && <InstrumentTable campaign={campaign} rows={tables.instruments} names={instruments} />}
    </>
  );
}
