import { InstrumentKey } from '../charts/instrument-mark.tsx';
import type { Campaign, InstrumentRow } from '../client/rows.ts';
import { SOURCE_NAMES, withError } from '../model/correction.ts';
import { instrumentPath } from '../routes.ts';
import { Downloads } from './download.tsx';

/** What was taken off the temperatures of each instrument, and where that came from. */
export function InstrumentTable(props: {
  campaign: Campaign;
  rows: readonly InstrumentRow[];
  names: readonly string[];
}) {
  const { campaign, rows, names } = props;
  return (
    <section class="instruments" aria-labelledby="instruments-title">
      <div class="section-head">
        <h2 id="instruments-title">Instruments</h2>
        <Downloads campaign={campaign} tables={['instruments']} />
      </div>
      {rows.length === 0 ? (
        <p class="waiting">Corrections are listed here once the first scan is reduced.</p>
      ) : (
        <table class="stack-table">
          <thead>
            <tr>
              <th scope="col">Instrument</th>
              <th scope="col">Kind</th>
              <th scope="col">Lag</th>
              <th scope="col">Offset</th>
              <th scope="col">Taken from</th>
            </tr>
          </thead>
          <tbody>
            {rows.map((row) => (
              <tr key={row.instrument}>
                <th scope="row">
                  <InstrumentKey instrument={names.indexOf(row.instrument)} />{' '}
                  <a href={instrumentPath(campaign.id, row.instrument)}>{row.instrument}</a>
                </th>
                <td data-head="kind">{row.kind ?? '–'}</td>
                <td class="number" data-head="lag">
                  {withError(row.lag_s, row.lag_se_s, 's')}
                </td>
                <td class="number" data-head="offset">
                  {withError(row.offset_K, row.offset_se_K, 'K')}
                </td>
                <td data-head="taken from">{SOURCE_NAMES[row.source]}</td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
    </section>
  );
}
