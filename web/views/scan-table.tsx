import type { Signal } from '@preact/signals';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import type { Campaign, ScanRow } from '../client/rows.ts';
import { formatFixed, formatRate, formatSignificant, formatTemperature } from '../format.ts';
import { units } from '../state/units.ts';
import { flagMeaning, SCAN_STATE_NAMES, sentence } from '../words.ts';
import { Downloads } from './download.tsx';

/** Every scan of the sample and what was found on it, slowest first. */
export function ScanTable(props: {
  campaign: Campaign;
  sample: string;
  scans: readonly ScanRow[];
  /** Id of the scan behind each row */
  ids: ReadonlyMap<ScanRow, string>;
  instruments: readonly string[];
  pointed: Signal<string | undefined>;
  onShow(key: string): void;
}) {
  const { campaign, sample, scans, ids, instruments, pointed, onShow } = props;
  const rate = (row: ScanRow): number => Math.abs(row.rate_K_per_s ?? row.rate_nominal_K_per_s ?? 0);
  const rateWords = (row: ScanRow): string => {
    if (row.rate_K_per_s === 0) return 'hold';
    return rate(row) > 0 ? formatRate(rate(row), units.value) : 'no rate';
  };
  const sorted = [...scans].sort((a, b) => rate(a) - rate(b) || (a.file < b.file ? -1 : 1));
  const temperature = (value: number | null) => (value === null ? '' : formatTemperature(value, units.value));
  const hasGlass = scans.some((row) => row.glass_transition_K !== null);
  const events = new Set(scans.map((row) => row.event).filter((event) => event !== null));
  return (
    <section aria-labelledby="scans-title">
      <div class="section-head">
        <h2 id="scans-title">Scans</h2>
        <Downloads campaign={campaign} tables={['scans', 'conversion']} sample={sample} />
      </div>
      <table class="stack-table">
        <thead>
          <tr>
            <th scope="col">Rate</th>
            <th scope="col">Instrument</th>
            {events.size > 1 && <th scope="col">Event</th>}
            {hasGlass && <th scope="col">Glass transition</th>}
            <th scope="col">Onset</th>
            <th scope="col">Peak</th>
            <th scope="col">Width</th>
            <th scope="col">Enthalpy</th>
            <th scope="col">File and flags</th>
          </tr>
        </thead>
        <tbody>
          {sorted.map((row) => {
            const id = ids.get(row);
            return (
              <tr
                key={`${row.file} ${row.segment} ${row.event}`}
                onPointerEnter={() => {
                  pointed.value = id;
                }}
              >
                <th scope="row" class="number">
                  {id !== undefined ? (
                    <button type="button" class="quiet row-button" onClick={() => onShow(id)}>
                      {rateWords(row)}
                      <span class="unseen">, show this scan</span>
                    </button>
                  ) : (
                    rateWords(row)
                  )}
                </th>
                <td>
                  <InstrumentKey
                    instrument={instruments.indexOf(row.instrument ?? '')}
                    look={row.status === 'reduced' ? 'full' : 'struck'}
                  />{' '}
                  {row.instrument}
                </td>
                {events.size > 1 && <td data-head="event">{row.event}</td>}
                {hasGlass && (
                  <td class="number" data-head="glass transition">
                    {temperature(row.glass_transition_K)}
                  </td>
                )}
                <td class="number" data-head="onset">
                  {temperature(row.onset_K)}
                </td>
                <td class="number" data-head="peak">
                  {temperature(row.peak_K)}
                </td>
                <td class="number" data-head="width">
                  {row.width_K === null ? '' : `${formatFixed(row.width_K, 1)}\u00a0K`}
                </td>
                <td class="number" data-head="enthalpy">
                  {row.enthalpy_J_per_g === null ? '' : `${formatSignificant(row.enthalpy_J_per_g)}\u00a0J/g`}
                </td>
                <td class="table-words">
                  <span class="file">{row.file.split('/').at(-1)}</span>
                  {row.status !== 'reduced' && <span class="tone-stop"> {SCAN_STATE_NAMES[row.status]}</span>}
                  {row.reason && <span class="aside">: {row.reason}</span>}
                  {row.flags.length > 0 && (
                    <span class="aside">
                      , {sentence(row.flags.map(flagMeaning).join('; ')).replace(/^./, (c) => c.toLowerCase())}
                    </span>
                  )}
                </td>
              </tr>
            );
          })}
        </tbody>
      </table>
    </section>
  );
}
