import { render } from 'preact';
import { App } from './app.tsx';
import { CHART_STYLE } from './charts/style.ts';

export function renderPage(): void {
  // By the object model: the content policy of the page allows no style element.
  const charts = new CSSStyleSheet();
  charts.replaceSync(CHART_STYLE);
  document.adoptedStyleSheets = [charts];
  const page = document.getElementById('page');
  if (page) render(<App />, page);
}
