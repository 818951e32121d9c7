import { useSignal } from '@preact/signals';
import { useEffect } from 'preact/hooks';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { createCampaign, listCampaigns, loadStatus } from '../client/campaigns.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';
import { describeCampaign } from '../model/describe.ts';
import { navigate } from '../router.ts';
import { ProblemNotice } from './notice.tsx';

/** Campaigns whose state is looked up for the list; the rest show their names only. */
const STATES_SHOWN = 30;

function NewCampaign() {
  const name = useSignal('');
  const problem = useSignal<Problem | undefined>(undefined);
  const busy = useSignal(false);
  const create = async (event: Event): Promise<void> => {
    event.preventDefault();
    problem.value = undefined;
    busy.value = true;
    try {
      const campaign = await createCampaign(name.value.trim());
      navigate(`/campaigns/${encodeURIComponent(campaign.id)}`);
    } catch (error) {
      problem.value = asProblem(error);
    } finally {
      busy.value = false;
    }
  };
  return (
    <form class="new-campaign" onSubmit={create}>
      <label for="campaign-name">New campaign</label>
      <div class="field-row">
        <input
          id="campaign-name"
          required
          maxLength={80}
          autocomplete="off"
          placeholder="Name, e.g. film series 4"
          value={name.value}
          onInput={(event) => {
            name.value = event.currentTarget.value;
          }}
        />
        <button type="submit" disabled={busy.value}>
          Create
        </button>
      </div>
      {problem.value && <ProblemNotice problem={problem.value} />}
    </form>
  );
}

export function CampaignListView() {
  const campaigns = useSignal<Campaign[] | undefined>(undefined);
  const states = useSignal<Record<string, CampaignStatus>>({});
  const problem = useSignal<Problem | undefined>(undefined);
  useEffect(() => {
    document.title = 'Campaigns – ratespan';
    const abort = new AbortController();
    const load = async (): Promise<void> => {
      const items = await listCampaigns(abort.signal);
      campaigns.value = items.sort((a, b) => (a.created_at < b.created_at ? 1 : -1));
      for (const { id } of campaigns.value.slice(0, STATES_SHOWN)) {
        const status = await loadStatus(id, abort.signal);
        states.value = { ...states.value, [id]: status };
      }
    };
    load().catch((error) => {
      if (!abort.signal.aborted) problem.value = asProblem(error);
    });
    return () => abort.abort();
  }, []);

  const list = campaigns.value;
  return (
    <div class="campaign-list">
      <h1>Campaigns</h1>
      <p class="lead">
        A campaign is a set of heating scans of a few samples, over as many decades of heating rate as the instruments
        reach. Create one, add the folder of exported text files, and watch what is done, what is missing and what to
        run next.
      </p>
      <NewCampaign />
      {problem.value && <ProblemNotice problem={problem.value} />}
      {!list && !problem.value && <p class="waiting">Loading the list of campaigns…</p>}
      {list?.length === 0 && <p class="waiting">No campaign yet. Give the first one a name above.</p>}
      {list && list.length > 0 && (
        <ul class="campaigns">
          {list.map(({ id, name }) => (
            <li key={id}>
              <a href={`/campaigns/${encodeURIComponent(id)}`}>{name}</a>
              <span class="campaign-state">{states.value[id] ? describeCampaign(states.value[id]).headline : ''}</span>
            </li>
          ))}
        </ul>
      )}
    </div>
  );
}
