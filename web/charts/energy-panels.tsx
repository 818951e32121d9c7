import type { CurveSeries } from '../model/curves.ts';
import { methodName, methodRank } from '../words.ts';
import { bandPath, linePath } from './curve-path.ts';
import { labelWidth } from './plot-frame.tsx';
import { createPlotScale, extent, type PlotScale } from './plot-scale.ts';

type MethodSeries = CurveSeries & { rest: string };

export interface EnergyPanel {
  series: MethodSeries;
  left: number;
  top: number;
  x: PlotScale;
  y: PlotScale;
  hasXLabels: boolean;
  hasYLabels: boolean;
}

export interface EnergyLayout {
  width: number;
  height: number;
  panels: EnergyPanel[];
  panelWidth: number;
  panelHeight: number;
}

const PANEL_HEIGHT = 132;
const NARROWEST_PANEL = 168;
const GAP = 14;
const TITLE = 20;

/**
 * A panel for each method on one common scale, so that methods which agree need not be told apart by colour. The scale spans at
 * least ±5 % of the mean: an energy that does not change looks flat.
 */
export function layoutEnergy(series: readonly MethodSeries[], width: number): EnergyLayout {
  const sorted = [...series].sort((a, b) => methodRank(a.rest) - methodRank(b.rest));
  const values = extent(...sorted.flatMap((s) => [s.y, s.lower ?? [], s.upper ?? []]));
  const all = sorted.flatMap((s) => s.y);
  const mean = all.reduce((sum, value) => sum + value, 0) / Math.max(1, all.length);
  const domain = extent(values, [mean * 0.95, mean * 1.05]);
  const ruler = createPlotScale(domain, [PANEL_HEIGHT, 0], { count: 4 });
  const margin = labelWidth(ruler) + 10;
  const columns = Math.max(1, Math.min(sorted.length, Math.floor((width - margin) / (NARROWEST_PANEL + GAP))));
  const panelWidth = (width - margin - GAP * (columns - 1) - 8) / columns;
  const rows = Math.ceil(sorted.length / columns);
  const step = PANEL_HEIGHT + TITLE + GAP;
  const panels = sorted.map((s, i): EnergyPanel => {
    const column = i % columns;
    const row = Math.floor(i / columns);
    const left = margin + column * (panelWidth + GAP);
    const top = 22 + row * step + TITLE;
    return {
      series: s,
      left,
      top,
      x: createPlotScale([0, 1], [left, left + panelWidth], { count: 2 }),
      y: createPlotScale(domain, [top + PANEL_HEIGHT, top], { count: 4 }),
      hasXLabels: i + columns >= sorted.length,
      hasYLabels: column === 0,
    };
  });
  return { width, height: 22 + rows * step + 34, panels, panelWidth, panelHeight: PANEL_HEIGHT };
}

/** The widest names do not fit over a panel. */
const shortName = (method: string): string =>
  method === 'vyazovkin_linear' ? 'Vyazovkin, linear' : methodName(method);

/** E against conversion by each isoconversional method, its 95 % band, and the other methods faint behind it. */
export function EnergyPanels({ layout }: { layout: EnergyLayout }) {
  const { panels, panelWidth, panelHeight, width, height } = layout;
  return (
    <>
      <text class="axis-name" x={0} y={13}>
        Activation energy E, kJ/mol
      </text>
      {panels.map(({ series, left, top, x, y, hasXLabels, hasYLabels }) => (
        <g key={series.name}>
          <text class="panel-title" x={left} y={top - 6}>
            {shortName(series.rest)}
          </text>
          <path
            class="grid-step"
            d={y.ticks.map(({ at }) => `M${left.toFixed(1)} ${at.toFixed(1)}h${panelWidth.toFixed(1)}`).join('')}
          />
          <path class="grid-decade" d={`M${left.toFixed(1)} ${top + panelHeight}h${panelWidth.toFixed(1)}`} />
          {hasYLabels &&
            y.ticks.map(({ at, label }) => (
              <text key={label} class="axis-label" x={left - 6} y={(at + 4).toFixed(1)} text-anchor="end">
                {label}
              </text>
            ))}
          {hasXLabels &&
            x.ticks.map(({ at, label }, i) => (
              <text
                key={label}
                class="axis-label"
                x={at.toFixed(1)}
                y={top + panelHeight + 15}
                text-anchor={i === 0 ? 'start' : i === x.ticks.length - 1 ? 'end' : 'middle'}
              >
                {label}
              </text>
            ))}
          {panels.map((other) =>
            other.series === series ? null : (
              <path key={other.series.name} class="curve-behind" d={linePath(other.series.x, other.series.y, x, y)} />
            ),
          )}
          {series.lower && series.upper && (
            <path class="band" d={bandPath(series.x, series.lower, series.upper, x, y)} />
          )}
          <path class="curve curve-front" d={linePath(series.x, series.y, x, y)} />
        </g>
      ))}
      <text class="axis-name" x={width - 8} y={height - 4} text-anchor="end">
        Conversion α
      </text>
    </>
  );
}
