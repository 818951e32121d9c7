import { formatTemperature, type Units } from '../format.ts';
import type { CurveSeries } from '../model/curves.ts';
import { bandPath, linePath } from './curve-path.ts';
import { InstrumentMark } from './instrument-mark.tsx';
import { createPlotBox, type PlotBox, PlotFrame } from './plot-frame.tsx';
import { createPlotScale, createTemperatureScale, extent, type PlotScale } from './plot-scale.ts';

type NamedSeries = CurveSeries & { rest: string };

export interface KissingerLayout {
  box: PlotBox;
  x: PlotScale;
  y: PlotScale;
  over: PlotScale;
  /** Peaks of the instruments */
  points: readonly NamedSeries[];
  /** Whether peaks stand twice, as measured (hollow) and with the verdict's lags taken off (full) */
  isCorrected: boolean;
  /** Laws drawn through them */
  laws: readonly NamedSeries[];
}

const HEIGHT = 340;

const isLagRemoved = ({ rest }: NamedSeries): boolean => rest.endsWith('lag removed');

/** 1000/T rises to the right as is usual; the temperature itself stands along the upper edge. */
export function layoutKissinger(all: readonly NamedSeries[], width: number, units: Units): KissingerLayout {
  const isCorrected = all.some(isLagRemoved);
  // The verdict brings its own straight law, through the peaks without lag.
  const series = all.filter((s) => !(isCorrected && s.rest === 'fit'));
  const box = createPlotBox(width, HEIGHT, 44, 44);
  const xs = extent(...series.map((s) => s.x));
  const ys = extent(...series.map((s) => s.y));
  const x = createPlotScale(xs, [box.left, box.right], {
    count: Math.max(2, Math.round(width / 110)),
    shown: (reciprocal) => reciprocal * 1000,
    hidden: (shown) => shown / 1000,
  });
  const low = 1 / x.valueAt(box.right);
  const high = 1 / x.valueAt(box.left);
  // Ticks of a linear axis of temperature, put where their reciprocals fall; too close ones are left out.
  const ruler = createTemperatureScale([low, high], [0, box.right - box.left], units);
  const places = ruler.ticks
    .map(({ at, label }) => ({ label, at: x.at(1 / ruler.valueAt(at)) }))
    .filter(({ at }) => at >= box.left && at <= box.right)
    .sort((a, b) => a.at - b.at);
  const ticks = places.filter(({ at }, i) => i === 0 || at - places[i - 1].at > 34);
  return {
    box,
    x,
    y: createPlotScale(ys, [box.bottom, box.top], { count: 6 }),
    over: { ...x, ticks },
    isCorrected,
    points: series.filter((s) => s.instrument !== undefined),
    laws: series.filter((s) => s.instrument === undefined),
  };
}

/** ln(β/Tp²) against 1000/Tp: marks of the instruments, laws as lines told apart by their dashes. */
export function KissingerPlot(props: { layout: KissingerLayout; instruments: readonly string[]; units: Units }) {
  const { layout, instruments, units } = props;
  const { box, x, y, over, points, laws, isCorrected } = layout;
  return (
    <PlotFrame
      box={box}
      x={x}
      y={y}
      xLabel="1000 K / peak temperature"
      yLabel="ln(β/Tp²), β in K/s, Tp in K"
      over={{ scale: over, label: `Peak temperature, ${units.temperature}` }}
    >
      {laws.map((law) =>
        law.lower && law.upper ? (
          <path key={`band ${law.name}`} class="band" d={bandPath(law.x, law.lower, law.upper, x, y)} />
        ) : null,
      )}
      {laws.map((law, i) => (
        <path key={law.name} class={`law dash-${i % 4}`} d={linePath(law.x, law.y, x, y)} />
      ))}
      {points.map((s) =>
        s.x.map((value, i) => (
          <g key={`${s.name} ${value}`}>
            <title>{`${s.instrument}: ${formatTemperature(1 / value, units)}`}</title>
            <InstrumentMark
              instrument={instruments.indexOf(s.instrument ?? '')}
              look={isCorrected && !isLagRemoved(s) ? 'hollow' : 'full'}
              x={x.at(value)}
              y={y.at(s.y[i])}
            />
          </g>
        )),
      )}
    </PlotFrame>
  );
}
