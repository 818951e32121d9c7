import { useSignal } from '@preact/signals';
import { useEffect } from 'preact/hooks';
import { FLAG_CODES, type FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { createIntervalScale, IntervalAxis, IntervalMark } from '../charts/interval-plot.tsx';
import { loadParameters } from '../client/campaigns.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';
import { formatRate } from '../format.ts';
import { describeEstimate } from '../model/describe.ts';
import { type EventNumbers, numbersBySample } from '../model/headline.ts';
import { units } from '../state/units.ts';
import { isNarrow } from '../state/viewport.ts';
import { flagMeaning, sentence } from '../words.ts';
import { Downloads } from './download.tsx';
import { ProblemNotice } from './notice.tsx';

const PLOT_WIDTH = 150;
const NARROW_PLOT_WIDTH = 100;
/** Samples whose tables are drawn before they are asked for: a large campaign has hundreds. */
const FIRST_TABLES = 12;

/** The consolidated numbers of each sample and event, by method, drawn on one scale so that disagreement shows. */
export function Numbers(props: {
  campaign: Campaign;
  /** Samples that have numbers */
  samples: readonly string[];
  /** Another value once the numbers may have changed */
  revision: unknown;
}) {
  const { campaign, samples, revision } = props;
  const showsAll = useSignal(false);
  const shown = showsAll.value ? samples : samples.slice(0, FIRST_TABLES);
  return (
    <section class="numbers" aria-labelledby="numbers-title">
      <div class="section-head">
        <h2 id="numbers-title">Numbers</h2>
        <Downloads campaign={campaign} tables={['parameters']} />
      </div>
      {samples.length === 0 ? (
        <p class="waiting">
          No sample is fitted yet. A fit starts when every scan of a sample is reduced or set aside, and needs three
          distinct heating rates.
        </p>
      ) : (
        <div class="number-tables">
          {shown.map((sample) => (
            <SampleNumbers key={sample} campaign={campaign} sample={sample} revision={revision} />
          ))}
        </div>
      )}
      {shown.length < samples.length && (
        <p class="show-all">
          <button
            type="button"
            onClick={() => {
              showsAll.value = true;
            }}
          >
            Show all {samples.length} samples
          </button>
        </p>
      )}
      {samples.length > 0 && (
        <p class="small">
          Value and 95 % interval. Methods that follow conversion are given as their mean over 0.1 to 0.9;
          parameters.csv has every conversion, other intervals and the values without outliers.
        </p>
      )}
    </section>
  );
}

/** Tables of one sample, loaded when they are shown: the rows of a large campaign are many. */
function SampleNumbers({ campaign, sample, revision }: { campaign: Campaign; sample: string; revision: unknown }) {
  const numbers = useSignal<EventNumbers[] | undefined>(undefined);
  const problem = useSignal<Problem | undefined>(undefined);
  useEffect(() => {
    const abort = new AbortController();
    loadParameters(campaign.id, { sample }, abort.signal)
      .then((rows) => {
        numbers.value = numbersBySample(rows).get(sample) ?? [];
        problem.value = undefined;
      })
      .catch((error) => {
        if (!abort.signal.aborted) problem.value = asProblem(error);
      });
    return () => abort.abort();
  }, [campaign.id, sample, revision]);
  if (problem.value) return <ProblemNotice problem={problem.value} />;
  const events = numbers.value;
  if (!events) return <p class="waiting numbers-waiting">Loading the numbers of {sample}…</p>;
  return (
    <>
      {events.map((event) => (
        <EventTable key={event.event} sample={sample} isOnly={events.length === 1} numbers={event} />
      ))}
    </>
  );
}

export function EventTable(props: { sample: string; isOnly: boolean; numbers: EventNumbers }) {
  const { sample, isOnly, numbers } = props;
  const any = numbers.energies[0] ?? numbers.exponents[0];
  return (
    <table class="event-numbers">
      <caption>
        <strong>{sample}</strong>
        {!isOnly && <span>event {numbers.event}</span>}
        {any && (
          <span>
            {any.scan_count} scans, {formatRate(any.rate_min_K_per_s, units.value)} to{' '}
            {formatRate(any.rate_max_K_per_s, units.value)}
          </span>
        )}
      </caption>
      <Quantity title="Activation energy E" unit="kJ/mol" rows={numbers.energies} />
      <Quantity title="Avrami exponent n" unit="" rows={numbers.exponents} />
      <Quantity title="Prefactor ln A" unit="A in 1/s" rows={numbers.prefactors} />
      <Quantity title="Enthalpy" unit="J/g" rows={numbers.enthalpies} />
    </table>
  );
}

function Quantity({ title, unit, rows }: { title: string; unit: string; rows: readonly ParameterRow[] }) {
  if (rows.length === 0) return null;
  const scale =
    rows.length > 1 ? createIntervalScale(rows, isNarrow.value ? NARROW_PLOT_WIDTH : PLOT_WIDTH) : undefined;
  return (
    <tbody>
      <tr>
        <th colSpan={3} scope="rowgroup">
          {title}
          {unit && <span class="unit"> {unit}</span>}
        </th>
      </tr>
      {rows.map((row) => {
        const { value, spread, method } = describeEstimate(row);
        return (
          <tr key={`${row.method} ${row.variant} ${row.temperature_K}`}>
            <th scope="row">{method}</th>
            <td class="plot">
              {scale && <IntervalMark scale={scale} value={row.value} lower95={row.lower95} upper95={row.upper95} />}
            </td>
            <td class="number">
              {value} <span class="spread">{spread}</span>
              <Concern flags={row.flags} />
            </td>
          </tr>
        );
      })}
      {scale && (
        <tr>
          <td />
          <td class="plot">
            <IntervalAxis scale={scale} />
          </td>
          <td />
        </tr>
      )}
    </tbody>
  );
}

/** A sign beside a number that its own flags put in doubt. */
function Concern({ flags }: { flags: readonly FlagCode[] }) {
  const meanings = flags.filter((code) => FLAG_CODES[code]?.[0] !== 'note').map(flagMeaning);
  if (meanings.length === 0) return null;
  const words = meanings.join('; ');
  return (
    <span class="concern tone-warn" title={sentence(words)}>
      <span aria-hidden="true">●</span>
      <span class="unseen">, flagged: {words}</span>
    </span>
  );
}
