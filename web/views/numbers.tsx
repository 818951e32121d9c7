import { useSignal } from '@preact/signals';
import { useEffect } from 'preact/hooks';
import { EventTable } from '../charts/number-table.tsx';
import { loadParameters } from '../client/campaigns.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';
import { type EventNumbers, numbersBySample } from '../model/headline.ts';
import { units } from '../state/units.ts';
import { isNarrow } from '../state/viewport.ts';
import { Downloads } from './download.tsx';
import { ProblemNotice } from './notice.tsx';

/** Width of the interval plots, px */
export const plotWidth = (): number => (isNarrow.value ? 100 : 150);
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
        <EventTable
          key={event.event}
          sample={sample}
          isOnly={events.length === 1}
          numbers={event}
          plotWidth={plotWidth()}
          units={units.value}
        />
      ))}
    </>
  );
}
