import type { ReadonlySignal } from '@preact/signals';
import type { ComponentChildren } from 'preact';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import { formatCount, formatFixed, formatRate, formatSignificant, formatTemperature } from '../format.ts';
import type { LedgerRow, ScanMark } from '../model/ledger.ts';
import { units } from '../state/units.ts';
import { flagMeaning, SCAN_STATE_NAMES } from '../words.ts';

function Field({ name, children }: { name: string; children: ComponentChildren }) {
  return (
    <div>
      <dt>{name}</dt>
      <dd>{children}</dd>
    </div>
  );
}

/** What is known of the scan pointed at, in a fixed place under the map. */
export function Readout(props: {
  active: ReadonlySignal<{ sample: string; mark: ScanMark } | undefined>;
  instruments: readonly string[];
  rows: readonly LedgerRow[];
}) {
  const at = props.active.value;
  if (!at) {
    return (
      <div class="readout is-idle">
        <Summary rows={props.rows} />
        <p>Point at a mark to read its scan here, or reach the map with Tab and move with the arrow keys.</p>
      </div>
    );
  }
  return (
    <div class="readout" aria-live="polite">
      <MarkDetail sample={at.sample} mark={at.mark} instruments={props.instruments} />
    </div>
  );
}

/** What the whole map holds, while nothing is pointed at. */
function Summary({ rows }: { rows: readonly LedgerRow[] }) {
  const marks = rows.flatMap((row) => row.marks);
  const rates = marks.map((mark) => mark.rateKPerS).filter((rate) => rate !== null);
  if (rates.length === 0) return null;
  const low = rates.reduce((a, b) => Math.min(a, b));
  const high = rates.reduce((a, b) => Math.max(a, b));
  return (
    <p class="readout-summary">
      {formatCount(marks.length, 'scan')}, {formatRate(low, units.value)} to {formatRate(high, units.value)}:{' '}
      {formatFixed(Math.log10(high / low), 1)} decades of heating rate
    </p>
  );
}

function MarkDetail(props: { sample: string; mark: ScanMark; instruments: readonly string[] }) {
  const { sample, mark, instruments } = props;
  const [first] = mark.rows;
  const temperature = (value: number | null) => (value === null ? undefined : formatTemperature(value, units.value));
  const nominal = first.rate_nominal_K_per_s;
  const flags = [...new Set(mark.rows.flatMap((row) => row.flags))];
  return (
    <>
      <p class="readout-title">
        <InstrumentKey instrument={instruments.indexOf(mark.instrument)} look={mark.look} />
        <strong>{sample}</strong>
        <span>{mark.instrument}</span>
        <span>{SCAN_STATE_NAMES[mark.status]}</span>
        <span class="file">
          {first.file}
          {first.segment !== null && `, segment ${first.segment}`}
        </span>
      </p>
      {first.reason && <p class="readout-reason">{first.reason}</p>}
      <dl>
        <Field name="rate">
          {mark.rateKPerS === null ? 'not known' : formatRate(mark.rateKPerS, units.value)}
          {nominal !== null && first.rate_K_per_s !== null && (
            <span class="aside"> nominal {formatRate(Math.abs(nominal), units.value)}</span>
          )}
        </Field>
        {first.glass_transition_K !== null && (
          <Field name="glass transition">{temperature(first.glass_transition_K)}</Field>
        )}
        {mark.rows
          .filter((row) => row.peak_K !== null)
          .map((row) => (
            <Field key={row.event} name={mark.rows.length > 1 ? `event ${row.event}: onset, peak` : 'onset, peak'}>
              {[temperature(row.onset_K), temperature(row.peak_K)].filter(Boolean).join(', ')}
              {row.width_K !== null && <span class="aside"> {formatFixed(row.width_K, 1)} K wide</span>}
              {row.enthalpy_J_per_g !== null && (
                <span class="aside"> {formatSignificant(row.enthalpy_J_per_g)} J/g</span>
              )}
            </Field>
          ))}
        {flags.length > 0 && <Field name="flags">{flags.map(flagMeaning).join('; ')}</Field>}
      </dl>
    </>
  );
}
