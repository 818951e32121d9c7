import { laterViews } from './later-views.ts';
import { path } from './router.ts';
import { parseRoute } from './routes.ts';
import { CampaignView } from './views/campaign.tsx';
import { CampaignListView } from './views/campaign-list.tsx';
import { lazyView } from './views/lazy-view.tsx';
import { Masthead } from './views/masthead.tsx';
import { Notice } from './views/notice.tsx';
import { TokenForm } from './views/token-form.tsx';

const SampleView = lazyView(laterViews.sample);
const InstrumentView = lazyView(laterViews.instrument);
const JobsView = lazyView(laterViews.jobs);

function View() {
  const route = parseRoute(path.value);
  switch (route.view) {
    case 'campaigns':
      return <CampaignListView />;
    case 'campaign':
      return <CampaignView key={route.id} id={route.id} />;
    case 'sample':
      return <SampleView key={path.value} id={route.id} sample={route.sample} />;
    case 'instrument':
      return <InstrumentView key={path.value} id={route.id} instrument={route.instrument} />;
    case 'jobs':
      return <JobsView key={route.id} id={route.id} />;
    case 'none':
      return (
        <Notice
          tone="stop"
          isPage
          title="No page at this address"
          detail={`Nothing is shown at ${path.value}.`}
          action="Go to the list of campaigns and choose one."
        >
          <a href="/">All campaigns</a>
        </Notice>
      );
  }
}

export function App() {
  return (
    <>
      <a class="skip" href="#main">
        Skip to the content
      </a>
      <Masthead />
      <main id="main" tabIndex={-1}>
        <TokenForm />
        <View />
      </main>
    </>
  );
}
