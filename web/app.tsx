import { path } from './router.ts';
import { CampaignView } from './views/campaign.tsx';
import { CampaignListView } from './views/campaign-list.tsx';
import { Masthead } from './views/masthead.tsx';
import { Notice } from './views/notice.tsx';

export function App() {
  const campaignId = /^\/campaigns\/([^/]+)\/?$/.exec(path.value)?.[1];
  return (
    <>
      <a class="skip" href="#main">
        Skip to the content
      </a>
      <Masthead />
      <main id="main" tabIndex={-1}>
        {campaignId ? (
          <CampaignView key={campaignId} id={decodeURIComponent(campaignId)} />
        ) : path.value === '/' ? (
          <CampaignListView />
        ) : (
          <Notice
            tone="stop"
            title="No page at this address"
            detail={`Nothing is shown at ${path.value}.`}
            action="Go to the list of campaigns and choose one."
          >
            <a href="/">All campaigns</a>
          </Notice>
        )}
      </main>
    </>
  );
}
