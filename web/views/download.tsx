import { useSignal } from '@preact/signals';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import { downloadTable } from '../client/campaigns.ts';
import { asProblem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';

/** Buttons that save tables as CSV. */
export function Downloads({ campaign, tables }: { campaign: Campaign; tables: readonly ResultTable[] }) {
  const trouble = useSignal('');
  const save = (table: ResultTable) => async () => {
    trouble.value = '';
    try {
      await downloadTable(campaign, table);
    } catch (error) {
      const { detail, action } = asProblem(error);
      trouble.value = `${table}.csv was not saved: ${detail} ${action}`;
    }
  };
  return (
    <div class="downloads">
      {tables.map((table) => (
        <button key={table} type="button" class="quiet" onClick={save(table)}>
          <svg width="12" height="12" viewBox="0 0 12 12" aria-hidden="true">
            <path d="M6 1v6.500M3 5l3 3 3-3M1 11h10" />
          </svg>
          <span class="unseen">Save </span>
          {table}.csv
        </button>
      ))}
      {trouble.value && <p role="alert">{trouble.value}</p>}
    </div>
  );
}
