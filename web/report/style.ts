import { CHART_STYLE, PAPER_COLOURS } from '../charts/style.ts';

/** Everything the report looks like: it loads nothing. */
export const REPORT_STYLE = `:root {
  --bench: #fff;
  --paper: #fff;
${PAPER_COLOURS}
  --text: system-ui, -apple-system, "Segoe UI", "Noto Sans", "Liberation Sans", "DejaVu Sans", sans-serif;
  color-scheme: light;
}
${CHART_STYLE}
* { box-sizing: border-box; }
body { max-width: 46rem; margin: 2rem auto; padding-inline: 1rem; font: 0.9375rem/1.5 var(--text); color: var(--ink); background: var(--paper); }
h1 { font-size: 1.75rem; line-height: 1.15; margin: 0 0 0.3rem; overflow-wrap: anywhere; }
h2 { font-size: 1.25rem; line-height: 1.2; margin: 2.5rem 0 0.6rem; padding-top: 0.5rem; border-top: 2px solid var(--ink); }
h3 { font-size: 1rem; margin: 1.6rem 0 0.4rem; overflow-wrap: anywhere; }
p, li { margin: 0 0 0.5rem; }
ul { padding-left: 1.2rem; }
svg { display: block; max-width: 100%; height: auto; }
td svg, li svg { display: inline-block; vertical-align: -0.25em; }
figure { margin: 1.2rem 0; }
figcaption, .small { font-size: 0.8125rem; color: var(--ink-soft); }
.table-box { position: relative; overflow-x: auto; }
.legend li { display: inline-flex; align-items: center; gap: 0.35rem; margin: 0; }
table { border-collapse: collapse; width: 100%; font-size: 0.8125rem; line-height: 1.35; margin-bottom: 1rem; }
caption { text-align: left; padding-bottom: 0.3rem; color: var(--ink-soft); }
caption strong { color: var(--ink); font-size: 0.9375rem; }
caption span { margin-left: 0.8rem; }
th, td { padding: 0.2rem 0.7rem 0.2rem 0; text-align: left; vertical-align: top; font-weight: 400; border-bottom: 1px solid var(--rule); }
thead th { color: var(--ink-soft); border-bottom-color: var(--edge); }
th[scope="rowgroup"] { font-weight: 600; padding-top: 0.6rem; }
.number { font-variant-numeric: tabular-nums; white-space: nowrap; }
.event-numbers .plot { width: 1px; }
.event-numbers .number { text-align: right; }
.unit, .spread, .aside { color: var(--ink-soft); font-weight: 400; }
.file, .hash { font-family: ui-monospace, "DejaVu Sans Mono", monospace; font-size: 0.92em; overflow-wrap: anywhere; }
.legend { display: flex; flex-wrap: wrap; gap: 0.2rem 1.2rem; list-style: none; padding: 0; margin: 0.3rem 0; font-size: 0.8125rem; }
.caution { padding: 0.6rem 0.8rem; border: 1px solid var(--edge); }
.tone-stop { color: var(--stop); }
.tone-warn { color: var(--warn); }
.concern { font-size: 0.7em; }
.unseen { position: absolute; width: 1px; height: 1px; overflow: hidden; clip-path: inset(50%); white-space: nowrap; }
.interval-mark { display: block; max-width: none; }
tbody th { white-space: nowrap; }
tbody th:has(.file), .with-words tbody th { white-space: normal; }
.with-words tbody th { min-width: 6.5rem; }
.with-words td:last-child { min-width: 14rem; width: 50%; }
.with-words td, .with-words th { padding-right: 0.5rem; }
.hash { font-size: 0.78em; }
.event-numbers tr:last-child td { border: 0; }
@media screen {
  .sample { content-visibility: auto; contain-intrinsic-size: auto 60rem; }
}
@media print {
  body { max-width: none; margin: 0; padding: 0; font-size: 9.5pt; }
  h2, h3, caption, tr:has(th[scope="rowgroup"]) { break-after: avoid; }
  .sample { break-before: page; }
  .hash { font-size: 6pt; white-space: nowrap; }
  figure, tr, .legend { break-inside: avoid; }
  thead { display: table-header-group; }
  .table-box { overflow: visible; }
  * { print-color-adjust: exact; }
}
@page { margin: 18mm 16mm; }
`;
