import { useSignal } from '@preact/signals';
import { useEffect, useMemo } from 'preact/hooks';
import { loadJobs, retryJob } from '../client/campaigns.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { JobRow, Status } from '../client/rows.ts';
import { formatCount, formatDuration } from '../format.ts';
import { openLivePage } from '../state/live-page.ts';
import { stepName } from '../words.ts';
import { ProblemNotice } from './notice.tsx';
import { NotYet, PageHead } from './page-head.tsx';

interface JobLists {
  failed: JobRow[];
  running: JobRow[];
  queued: JobRow[];
}

const openJobs = (id: string) =>
  openLivePage(id, async (_: Status, signal): Promise<JobLists> => {
    const [failed, running, queued] = await Promise.all([
      loadJobs(id, 'failed', signal),
      loadJobs(id, 'running', signal),
      loadJobs(id, 'queued', signal),
    ]);
    return { failed, running, queued };
  });

/** Rows of a list drawn at most; the rest are counted. */
const SHOWN = 100;

/** What the program works on, what waits, and what failed, with the error and another try. */
export function JobsView({ id }: { id: string }) {
  const live = useMemo(() => openJobs(id), [id]);
  useEffect(() => () => live.close(), [live]);
  const campaign = live.campaign.value;
  const data = live.data.value;
  const status = live.status.value;
  useEffect(() => {
    document.title = `Jobs – ${campaign?.name ?? 'ratespan'}`;
  }, [campaign?.name]);
  if (!campaign || !data) return <NotYet problem={live.problem.value} what="the jobs" campaignId={id} />;
  const nameOf = (job: JobRow): string => status?.samples.find((s) => s.id === job.subject)?.sample ?? job.subject;
  const isIdle = data.failed.length + data.running.length + data.queued.length === 0;
  return (
    <>
      <PageHead campaign={campaign} title="Jobs" link={live.link.value}>
        <p aria-live="polite">
          {isIdle
            ? 'Nothing to do: every job is done.'
            : [
                formatCount(data.running.length, 'job') + ' running',
                `${data.queued.length} queued`,
                `${data.failed.length} failed`,
                ...(status?.eta_s ? [`about ${formatDuration(status.eta_s)} left`] : []),
              ].join(', ')}
        </p>
      </PageHead>
      {live.problem.value && <ProblemNotice problem={live.problem.value} />}
      <FailedJobs jobs={data.failed} nameOf={nameOf} onRetried={() => live.reload()} />
      <JobList title="Running" jobs={data.running} nameOf={nameOf} />
      <JobList title="Queued" jobs={data.queued} nameOf={nameOf} />
    </>
  );
}

function FailedJobs(props: { jobs: readonly JobRow[]; nameOf(job: JobRow): string; onRetried(): void }) {
  const { jobs, nameOf, onRetried } = props;
  const problem = useSignal<Problem | undefined>(undefined);
  const busy = useSignal(false);
  const retry = (chosen: readonly JobRow[]) => async () => {
    busy.value = true;
    problem.value = undefined;
    try {
      for (const job of chosen) await retryJob(job.id);
    } catch (error) {
      problem.value = asProblem(error);
    } finally {
      busy.value = false;
      onRetried();
    }
  };
  if (jobs.length === 0) return null;
  return (
    <section aria-labelledby="failed-title">
      <div class="section-head">
        <h2 id="failed-title">Failed</h2>
        {jobs.length > 1 && (
          <button type="button" disabled={busy.value} onClick={retry(jobs)}>
            Try all {jobs.length} again
          </button>
        )}
      </div>
      {problem.value && <ProblemNotice problem={problem.value} />}
      <ul class="job-list">
        {jobs.slice(0, SHOWN).map((job) => (
          <li key={job.id}>
            <div>
              <p class="step-what">
                {stepName(job.step)} <span class="file">{nameOf(job)}</span>
              </p>
              <p class="job-error">{job.last_error ?? 'no error was recorded'}</p>
              <p class="small">{formatCount(job.attempts, 'try', 'tries')}</p>
            </div>
            <button type="button" disabled={busy.value} onClick={retry([job])}>
              Try again
              <span class="unseen">
                : {stepName(job.step)}, {nameOf(job)}
              </span>
            </button>
          </li>
        ))}
      </ul>
      {jobs.length > SHOWN && <p class="small">and {jobs.length - SHOWN} more</p>}
    </section>
  );
}

function JobList({ title, jobs, nameOf }: { title: string; jobs: readonly JobRow[]; nameOf(job: JobRow): string }) {
  if (jobs.length === 0) return null;
  return (
    <section>
      <h2>{title}</h2>
      <ul class="job-list">
        {jobs.slice(0, SHOWN).map((job) => (
          <li key={job.id}>
            <p>
              {stepName(job.step)} <span class="file">{nameOf(job)}</span>
              {job.attempts > 1 && <span class="aside">, try {job.attempts}</span>}
              {job.last_error && <span class="aside">, before: {job.last_error}</span>}
            </p>
          </li>
        ))}
      </ul>
      {jobs.length > SHOWN && <p class="small">and {jobs.length - SHOWN} more</p>}
    </section>
  );
}
