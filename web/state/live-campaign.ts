import { type Signal, signal } from '@preact/signals';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { loadCampaign, loadTable, type TableRows } from '../client/campaigns.ts';
import { followStatus, type Link } from '../client/follow-status.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';

export type Tables = { [Table in keyof TableRows]: TableRows[Table][] };

export interface LiveCampaign {
  campaign: Signal<Campaign | undefined>;
  status: Signal<CampaignStatus | undefined>;
  tables: Signal<Tables | undefined>;
  link: Signal<Link>;
  /** Why the page as a whole, or its tables, cannot be shown or may be old. */
  problem: Signal<Problem | undefined>;
  close(): void;
}

/** Least time between two loads of the tables while jobs run. */
const RELOAD_AFTER_MS = 1_000;
const RETRY_AFTER_MS = 3_000;

/** Opens a campaign: its name, its status as it changes, and its tables, loaded again after every change. */
export function openCampaign(id: string): LiveCampaign {
  const abort = new AbortController();
  const live: LiveCampaign = {
    campaign: signal(undefined),
    status: signal(undefined),
    tables: signal(undefined),
    link: signal('connecting'),
    problem: signal(undefined),
    close: () => abort.abort(),
  };
  let loading = false;
  let changed = false;

  const loadTables = async (): Promise<void> => {
    if (loading) {
      changed = true;
      return;
    }
    loading = true;
    do {
      changed = false;
      const started = performance.now();
      try {
        const of = <Table extends keyof TableRows>(table: Table) => loadTable(id, table, abort.signal);
        const [scans, coverage, gaps, flags, parameters, instruments] = await Promise.all([
          of('scans'),
          of('coverage'),
          of('gaps'),
          of('flags'),
          of('parameters'),
          of('instruments'),
        ]);
        live.tables.value = { scans, coverage, gaps, flags, parameters, instruments };
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

  const start = async (): Promise<void> => {
    while (live.campaign.value === undefined) {
      try {
        live.campaign.value = await loadCampaign(id, abort.signal);
      } catch (error) {
        if (abort.signal.aborted) return;
        const problem = asProblem(error);
        live.problem.value = problem;
        // A refusal stays one; a server that is away or busy may come back.
        if (problem.status >= 400 && problem.status < 500 && problem.status !== 429) return;
        live.link.value = 'offline';
        await new Promise((resolve) => setTimeout(resolve, RETRY_AFTER_MS));
      }
    }
    let seen = '';
    await followStatus(
      id,
      {
        onStatus(status, isNews) {
          const { queued, running, failed } = status.jobs;
          const text = JSON.stringify([status.scans, status.samples, status.settled, queued, running, failed]);
          live.status.value = status;
          if (isNews || text !== seen || live.problem.value) void loadTables();
          seen = text;
        },
        onLink(link, problem) {
          live.link.value = link;
          if (link === 'offline' && problem) live.problem.value = problem;
        },
      },
      abort.signal,
    );
  };
  void start();
  return live;
}
