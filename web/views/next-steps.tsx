import { useSignal } from '@preact/signals';
import type { GapRow } from '../../schema/wire/campaign.ts';
import type { AdviceRow } from '../../schema/wire/forecasts.ts';
import { SeverityGlyph } from '../charts/state-glyph.tsx';
import type { Campaign, FlagRow } from '../client/rows.ts';
import { type FlagGroup, groupFlags, groupGaps } from '../model/next-steps.ts';
import { isPrinting } from '../state/printing.ts';
import { gapName, sentence } from '../words.ts';
import { Downloads } from './download.tsx';

/** Groups with more places than this start closed. */
const OPEN_UP_TO = 3;
/** Places of one group drawn at most. */
const PLACES_SHOWN = 200;

/** What stops a result, what is missing, what looks wrong, what is worth knowing: each with what to do. */
export function NextSteps(props: {
  campaign: Campaign;
  /** Set on the page of one sample: what concerns it alone */
  sample?: string;
  flags: readonly FlagRow[];
  gaps: readonly GapRow[];
  advice: readonly AdviceRow[];
  isSettled: boolean;
}) {
  const { campaign, sample, flags, gaps, advice, isSettled } = props;
  const { stop, warn, note } = groupFlags(flags, gaps);
  const isClear = stop.length + warn.length + gaps.length === 0;
  return (
    <section class="next-steps" aria-labelledby="next-title">
      <div class="section-head">
        <h2 id="next-title">What to do next</h2>
        <Downloads campaign={campaign} tables={['flags', 'gaps', 'advice']} sample={sample} />
      </div>
      {isSettled && isClear && <p class="waiting">Nothing is missing and nothing was flagged.</p>}
      {!isSettled && (
        <p class="waiting still-working">
          The scans are still being worked on. Missing files and missing measurements are listed once it is known what
          came.
        </p>
      )}
      <div class="step-columns">
        <Steps severity="stop" title="Stops a result" groups={stop} />
        {gaps.length > 0 && <Gaps gaps={gaps} />}
        {advice.length > 0 && <Advice advice={advice} />}
        <Steps severity="warn" title="Look at" groups={warn} />
        <Steps severity="note" title="Good to know" groups={note} />
      </div>
    </section>
  );
}

function Steps(props: { severity: 'stop' | 'warn' | 'note'; title: string; groups: readonly FlagGroup[] }) {
  const { severity, title, groups } = props;
  if (groups.length === 0) return null;
  return (
    <div class={`steps steps-${severity}`}>
      <h3>
        <SeverityGlyph severity={severity} />
        {title}
      </h3>
      <ul>
        {groups.map((group) => (
          <li key={`${group.code} ${group.action}`}>
            <p class="step-what">{sentence(group.meaning)}</p>
            <p class="step-do">{sentence(group.action)}</p>
            <Places flags={group.flags} opensAtOnce={severity !== 'note' && group.flags.length <= OPEN_UP_TO} />
          </li>
        ))}
      </ul>
    </div>
  );
}

/** Where a group of flags holds, drawn when it is unfolded: a large campaign has thousands. */
function Places({ flags, opensAtOnce }: { flags: readonly FlagRow[]; opensAtOnce: boolean }) {
  const isUnfolded = useSignal(opensAtOnce);
  const isOpen = isUnfolded.value || isPrinting.value;
  return (
    <details
      open={isOpen}
      onToggle={(event) => {
        if (!isPrinting.value) isUnfolded.value = event.currentTarget.open;
      }}
    >
      <summary>{flags.length === 1 ? 'Where' : `Where, ${flags.length} places`}</summary>
      {isOpen && (
        <ul class="step-places">
          {flags.slice(0, PLACES_SHOWN).map((flag, i) => (
            <li key={i} class="step-place">
              <span class="place">{placeOf(flag)}</span> {flag.detail}
            </li>
          ))}
          {flags.length > PLACES_SHOWN && <li>and {flags.length - PLACES_SHOWN} more, listed in flags.csv</li>}
        </ul>
      )}
    </details>
  );
}

const placeOf = (flag: FlagRow): string =>
  flag.file ?? ([flag.sample, flag.instrument].filter(Boolean).join(', ') || 'campaign');

/** The scan of each sample that would narrow an interval most. */
function Advice({ advice }: { advice: readonly AdviceRow[] }) {
  const first = advice.filter(({ rank }) => rank === 1);
  return (
    <div class="steps steps-gap">
      <h3>
        <SeverityGlyph severity="gap" />
        Would tell most
      </h3>
      <ul class="step-places">
        {first.slice(0, PLACES_SHOWN).map((row) => (
          <li key={`${row.sample} ${row.event} ${row.goal}`} class="step-place">
            <span class="place">{row.sample}</span> {row.sentence}
          </li>
        ))}
      </ul>
    </div>
  );
}

function Gaps({ gaps }: { gaps: readonly GapRow[] }) {
  return (
    <div class="steps steps-gap">
      <h3>
        <SeverityGlyph severity="gap" />
        Missing measurements
      </h3>
      <ul>
        {groupGaps(gaps).map(({ code, gaps: same }) => (
          <li key={code}>
            <p class="step-what">{sentence(gapName(code))}</p>
            <ul class="step-places">
              {same.slice(0, PLACES_SHOWN).map((gap) => (
                <li key={`${gap.sample} ${gap.detail}`} class="step-place">
                  <span class="place">{gap.sample || 'campaign'}</span> {sentence(gap.detail)}
                  <p class="step-do">{sentence(gap.action)}</p>
                </li>
              ))}
            </ul>
          </li>
        ))}
      </ul>
    </div>
  );
}
