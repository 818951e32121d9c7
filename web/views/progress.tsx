import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import type { ScanState } from '../../schema/wire/states.ts';
import type { Link } from '../client/follow-status.ts';
import { formatCount } from '../format.ts';
import { describeCampaign } from '../model/describe.ts';
import { SCAN_STATE_NAMES } from '../words.ts';

const ORDER: ScanState[] = ['reduced', 'read', 'received', 'set_aside', 'failed', 'excluded', 'unassigned'];

export const LINK_WORDS: Record<Link, string> = {
  connecting: 'connecting…',
  live: 'live',
  polling: 'asking every 2 s',
  offline: 'server not reached, trying again',
};

/** Where the campaign stands: a sentence, a bar of scans by state, and how the page hears of changes. */
export function Progress(props: { status: CampaignStatus; link: Link; jobsHref: string }) {
  const { status, link, jobsHref } = props;
  const { headline, work } = describeCampaign(status);
  const present = ORDER.filter((state) => status.scans[state] > 0);
  return (
    <div class="progress">
      <p class="progress-words" aria-live="polite">
        <strong>{headline}</strong>
        {work && <span>{work}</span>}
        {status.settled && present.length > 0 && <span>nothing left to run</span>}
        {status.jobs.failed > 0 && <span class="tone-stop">{formatCount(status.jobs.failed, 'job')} failed</span>}
        <a href={jobsHref}>Jobs</a>
        <span class={`link link-${link}`}>{LINK_WORDS[link]}</span>
      </p>
      {present.length > 0 && (
        <>
          <svg class="progress-bar" width="100%" height="8" aria-hidden="true">
            <ProgressParts status={status} present={present} />
          </svg>
          <ul class="progress-key">
            {present.map((state) => (
              <li key={state}>
                <span class={`swatch scans-${state}`} aria-hidden="true" />
                {status.scans[state]} {SCAN_STATE_NAMES[state]}
              </li>
            ))}
          </ul>
        </>
      )}
    </div>
  );
}

function ProgressParts({ status, present }: { status: CampaignStatus; present: readonly ScanState[] }) {
  const total = present.reduce((sum, state) => sum + status.scans[state], 0);
  let before = 0;
  return (
    <>
      {present.map((state) => {
        const x = (100 * before) / total;
        before += status.scans[state];
        return (
          <rect
            key={state}
            class={`scans-${state}`}
            x={`${x}%`}
            width={`${(100 * status.scans[state]) / total}%`}
            height="8"
          />
        );
      })}
    </>
  );
}
