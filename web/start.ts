import { askForPage } from './client/overview.ts';
import { bringView } from './later-views.ts';
import { parseRoute } from './routes.ts';

// A small script of its own: the server answers while the rest of the script is still being read.
const route = parseRoute(location.pathname);
askForPage(route);
// Not awaited at the top: the rest imports from this script and would wait for its end.
void Promise.all([import('./main.tsx'), bringView(route).catch(() => undefined)]).then(([{ renderPage }]) =>
  renderPage(),
);
