import { askForPage } from './client/overview.ts';
import { bringView } from './later-views.ts';
import { parseRoute } from './routes.ts';

/** How long the page waits for the first answer before it says that it is loading, ms: drawing that takes time too. */
const PATIENCE_MS = 300;

// A small script of its own: the server answers while the rest of the script is still being read.
const route = parseRoute(location.pathname);
const answered = askForPage(route);
const patience = new Promise((resolve) => setTimeout(resolve, PATIENCE_MS));
// Not awaited at the top: the rest imports from this script and would wait for its end.
void Promise.all([
  import('./main.tsx'),
  bringView(route).catch(() => undefined),
  Promise.race([answered, patience]),
]).then(([{ renderPage }]) => renderPage());
