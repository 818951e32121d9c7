import { batch, type Signal, signal } from '@preact/signals';
import { loadCampaign } from '../client/campaigns.ts';
import { followStatus, type Link } from '../client/follow-status.ts';
import { loadOverview, type Overview } from '../client/overview.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { Campaign, Status } from '../client/rows.ts';
import { afterPaint } from './after-paint.ts';

export interface LivePage<Data> {
  campaign: Signal<Campaign | undefined>;
  status: Signal<Status | undefined>;
  /** What the page shows beside the status. */
  data: Signal<Data | undefined>;
  link: Signal<Link>;
  /** Why the page as a whole, or its data, cannot be shown or may be old. */
  problem: Signal<Problem | undefined>;
  /** Loads the data again, e.g. after a correction. */
  reload(): void;
  close(): void;
}

/** Least time between two loads while jobs run. */
const RELOAD_AFTER_MS = 1_000;
const RETRY_AFTER_MS = 3_000;

/** What a page shows first, from one answer. */
export interface FirstLook<Data> {
  /** The one sample that the page is about */
  sample?: string;
  /** The page's data as far as the overview has them */
  show(overview: Overview): Data | undefined;
  /** Whether more data is to come after that */
  hasMore(overview: Overview): boolean;
}

/** Opens a page of a campaign: its name, its status as it changes, and the page's data, loaded again after every change. */
export function openLivePage<Data>(
  id: string,
  load: (status: Status, signal: AbortSignal) => Promise<Data>,
  first?: FirstLook<Data>,
): LivePage<Data> {
  const abort = new AbortController();
  let loading = false;
  let changed = false;

  const loadData = async (): Promise<void> => {
    if (loading) {
      changed = true;
      return;
    }
    loading = true;
    do {
      changed = false;
      const started = performance.now();
      try {
        if (live.status.value) live.data.value = await load(live.status.value, abort.signal);
        live.problem.value = undefined;
      } catch (error) {
        if (abort.signal.aborted) return;
        live.problem.value = asProblem(error);
      }
      // A large campaign is asked for less often: never more than a fifth of the time is spent loading.
      const took = performance.now() - started;
      await new Promise((resolve) => setTimeout(resolve, Math.max(RELOAD_AFTER_MS, 4 * took)));
    } while (changed && !abort.signal.aborted);
    loading = false;
  };

  const live: LivePage<Data> = {
    campaign: signal(undefined),
    status: signal(undefined),
    data: signal(undefined),
    link: signal('connecting'),
    problem: signal(undefined),
    reload: () => void loadData(),
    close: () => abort.abort(),
  };

  let seen = '';
  const textOf = ({ scans, samples, settled, jobs: { queued, running, failed } }: Status): string =>
    JSON.stringify([scans, samples, settled, queued, running, failed]);
  const take = (status: Status, isNews: boolean): void => {
    const text = textOf(status);
    // The same again is not told on: whatever shows the status would be worked out anew.
    if (text !== seen || status.eta_s !== live.status.value?.eta_s) live.status.value = status;
    if (isNews || text !== seen || live.problem.value) void loadData();
    seen = text;
  };
  /** Asks until the server answers; a refusal is told and ends the page. */
  const insist = async (ask: () => Promise<void>): Promise<void> => {
    while (!abort.signal.aborted) {
      try {
        return await ask();
      } catch (error) {
        if (abort.signal.aborted) return;
        const problem = asProblem(error);
        live.problem.value = problem;
        // A refusal stays one; a server that is away or busy may come back.
        if (problem.status >= 400 && problem.status < 500 && problem.status !== 429) {
          abort.abort();
          return;
        }
        live.link.value = 'offline';
        await new Promise((resolve) => setTimeout(resolve, RETRY_AFTER_MS));
      }
    }
  };
  const follow = (known?: string): void =>
    void followStatus(
      id,
      {
        onStatus: take,
        onLink(link, problem) {
          live.link.value = link;
          if (link === 'offline' && problem) live.problem.value = problem;
        },
      },
      abort.signal,
      known,
    );
  const lookFirst = async ({ sample, show, hasMore }: FirstLook<Data>): Promise<void> => {
    const overview = await loadOverview(id, sample, abort.signal);
    batch(() => {
      live.campaign.value = overview.campaign;
      live.data.value = show(overview);
      live.problem.value = undefined;
      seen = textOf(overview.status);
      live.status.value = overview.status;
    });
    // What the reader sees first is not held up by what comes next.
    afterPaint(() => {
      if (hasMore(overview)) void loadData();
      follow(overview.state);
    });
  };
  if (first) void insist(() => lookFirst(first));
  else {
    // Name and status are asked for side by side: the page waits for as few answers in turn as can be.
    void insist(async () => {
      live.campaign.value = await loadCampaign(id, abort.signal);
    });
    follow();
  }
  return live;
}
