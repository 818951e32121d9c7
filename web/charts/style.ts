/**
 * Look of the charts, one text for the page and for the report that stands by itself. Colours are the names that
 * `web/style/tokens.css` declares on the page and PAPER_COLOURS in the report.
 */
export const CHART_STYLE = `
.mark {
  fill: var(--hue);
  stroke: var(--paper);
  stroke-width: 1;
  paint-order: stroke;
}

.grid-step {
  fill: none;
  stroke: var(--grid-step);
}

.grid-decade,
.grid-edge,
.rail {
  fill: none;
  stroke: var(--grid-decade);
}

.grid-edge {
  stroke-dasharray: 2 3;
}

.hue-0 {
  --hue: var(--hue-0);
}

.hue-1 {
  --hue: var(--hue-1);
}

.hue-2 {
  --hue: var(--hue-2);
}

.hue-3 {
  --hue: var(--hue-3);
}

.hue-4 {
  --hue: var(--hue-4);
}

.hue-5 {
  --hue: var(--hue-5);
}

.muted-key .mark {
  --hue: var(--ink-soft);
}

.mark.look-hollow,
.mark.look-struck {
  fill: var(--paper);
  stroke: var(--hue);
  stroke-width: 1.6;
}

.mark-strike {
  stroke: var(--ink);
  stroke-width: 1.4;
}

.mark-concern {
  fill: currentcolor;
  stroke: var(--paper);
  stroke-width: 1.5;
}

.active-ring {
  fill: none;
  stroke: var(--ink);
  stroke-width: 1.5;
}

.empty-decade {
  fill: var(--gap-wash);
  stroke: var(--gap);
  stroke-dasharray: 3 3;
}

.advised {
  fill: none;
  stroke: var(--gap);
  stroke-width: 1.6;
  stroke-dasharray: 2.5 2;
}

.empty-decade-label {
  font: 0.75rem var(--text);
  fill: var(--gap);
}

.state-glyph,
.severity-glyph {
  flex: none;
}

.glyph-line {
  fill: none;
  stroke: currentcolor;
  stroke-width: 1.5;
}

.glyph-fill,
.glyph-solid {
  fill: currentcolor;
}

.glyph-cut {
  fill: none;
  stroke: var(--paper);
  stroke-width: 1.8;
}

.state-fitted {
  color: var(--action);
}

.state-insufficient,
.state-failed {
  color: var(--stop);
}

.axis-label {
  font: 0.75rem var(--text);
  font-variant-numeric: tabular-nums;
  fill: var(--ink-soft);
}

.interval-line,
.interval-value {
  fill: none;
  stroke: var(--ink-soft);
  stroke-width: 1.5;
}

.interval-value {
  stroke: var(--ink);
  stroke-width: 2.5;
}

.axis-name,
.panel-title,
.lane-label,
.plot-label {
  font: 0.75rem var(--text);
  font-variant-numeric: tabular-nums;
  fill: var(--ink);
}

.panel-title {
  font-weight: 600;
}

.curve {
  fill: none;
  stroke: var(--hue, var(--ink));
  stroke-width: 1.3;
  stroke-linejoin: round;
}

.curve-front {
  stroke: var(--hue, var(--ink));
  stroke-width: 1.8;
}

.curve-behind {
  fill: none;
  stroke: var(--grid-decade);
}

.curve-pointed {
  fill: none;
  stroke: var(--ink);
  stroke-width: 2.6;
}

.baseline {
  fill: none;
  stroke: var(--ink-soft);
  stroke-dasharray: 4 3;
}

.band {
  fill: var(--ink);
  fill-opacity: 0.13;
}

.law {
  fill: none;
  stroke: var(--ink);
  stroke-width: 1.4;
}

.measured {
  stroke-width: 2.6;
}

.dash-1 {
  stroke-dasharray: 7 4;
}

.dash-2 {
  stroke-dasharray: 2 3;
}

.dash-3 {
  stroke-dasharray: 9 3 2 3;
}

.peak-tick {
  fill: none;
  stroke: var(--ink);
  stroke-width: 1.6;
}

.temperature-line {
  fill: none;
  stroke: var(--ink-soft);
  stroke-dasharray: 1 3;
}

.plot-label {
  paint-order: stroke;
  stroke: var(--paper);
  stroke-width: 3;
}

.limits {
  fill: var(--action);
  fill-opacity: 0.07;
}

.small-mark .mark {
  stroke-width: 1.5;
}

.lane-pointed {
  fill: var(--ink);
  fill-opacity: 0.06;
}

.lane-chosen {
  fill: var(--action);
  fill-opacity: 0.13;
}
`;

/** The light colours of `web/style/tokens.css` that a report on white paper needs; a test holds them equal. */
export const PAPER_COLOURS = `
  --ink: #15201c;
  --ink-soft: #4b5953;
  --rule: #c9d3cd;
  --edge: #7c8a83;
  --grid-step: #e6ece8;
  --grid-decade: #bccac2;
  --action: #0c5754;
  --stop: #a11c2c;
  --warn: #895100;
  --note: #3d5a78;
  --gap: #5d4a86;
  --gap-wash: #ece7f5;
  --hue-0: #3376f0;
  --hue-1: #cc5a00;
  --hue-2: #500d3b;
  --hue-3: #147077;
  --hue-4: #574e0e;
  --hue-5: #3d0096;
`;
