import { useSignal } from '@preact/signals';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import { copyTable, downloadReport, downloadResults, downloadTable } from '../client/campaigns.ts';
import { asProblem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';

export const SaveSign = () => (
  <svg width="12" height="12" viewBox="0 0 12 12" aria-hidden="true">
    <path d="M6 1v6.500M3 5l3 3 3-3M1 11h10" />
  </svg>
);

const CopySign = () => (
  <svg width="12" height="12" viewBox="0 0 12 12" aria-hidden="true">
    <path d="M1 1h7v7h-7zM11 4v7h-7" />
  </svg>
);

/** Buttons that save all of a campaign: the report to print or attach, and every table in one archive. */
export function WholeDownloads({ campaign }: { campaign: Campaign }) {
  const words = useSignal('');
  const save = (name: string, act: (of: Campaign) => Promise<void>) => async () => {
    words.value = `Making ${name}…`;
    try {
      await act(campaign);
      words.value = '';
    } catch (error) {
      const { detail, action } = asProblem(error);
      words.value = `${name} was not saved: ${detail} ${action}`;
    }
  };
  return (
    <div class="downloads">
      <button type="button" class="quiet" onClick={save('report.html', downloadReport)}>
        <SaveSign />
        <span class="unseen">Save </span>report.html
      </button>
      <button type="button" class="quiet" onClick={save('results.zip', downloadResults)}>
        <SaveSign />
        <span class="unseen">Save </span>results.zip
      </button>
      <p role="status">{words.value}</p>
    </div>
  );
}

/** Buttons that save tables as CSV or put them on the clipboard, whole or for one sample. */
export function Downloads(props: { campaign: Campaign; tables: readonly ResultTable[]; sample?: string }) {
  const { campaign, tables, sample } = props;
  const words = useSignal('');
  const filter = sample === undefined ? {} : { sample };
  const run = (table: ResultTable, act: typeof downloadTable, done: string, failed: string) => async () => {
    words.value = '';
    try {
      await act(campaign, table, filter);
      words.value = done;
    } catch (error) {
      const { detail, action } = asProblem(error);
      words.value = `${table}.csv was not ${failed}: ${detail} ${action}`;
    }
  };
  return (
    <div class="downloads">
      {tables.map((table) => (
        <span key={table} class="download-pair">
          <button type="button" class="quiet" onClick={run(table, downloadTable, '', 'saved')}>
            <SaveSign />
            <span class="unseen">Save </span>
            {table}.csv
          </button>
          <button
            type="button"
            class="quiet copy"
            title={`Copy ${table}, cells parted by tabs`}
            onClick={run(table, copyTable, `${table} copied`, 'copied')}
          >
            <CopySign />
            <span class="unseen">Copy {table}</span>
          </button>
        </span>
      ))}
      {words.value && <p role="status">{words.value}</p>}
    </div>
  );
}
