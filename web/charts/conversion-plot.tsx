import type { Units } from '../format.ts';
import type { CurveSeries } from '../model/curves.ts';
import { linePath } from './curve-path.ts';
import { InstrumentMark } from './instrument-mark.tsx';
import { createPlotBox, type PlotBox, PlotFrame } from './plot-frame.tsx';
import { createHoldsScale, createLaneScale, createPlotScale, extent, type PlotScale } from './plot-scale.ts';

export interface CurveLayout {
  box: PlotBox;
  x: PlotScale;
  xLabel: string;
  y: PlotScale;
  series: readonly CurveSeries[];
}

const HEIGHT = 320;
/** A mark stands on each curve at this conversion, so that the instrument is told by shape too. */
const MARKED_CONVERSION = 0.5;

export function layoutConversion(series: readonly CurveSeries[], width: number, units: Units): CurveLayout {
  const box = createPlotBox(width, HEIGHT, 34);
  const values = extent(...series.map((s) => s.x));
  const range: [number, number] = [box.left, box.right];
  const { scale: x, label: xLabel } = series[0]?.time_s
    ? createHoldsScale(values, range)
    : createLaneScale(undefined, values, range, units);
  return {
    box,
    x,
    xLabel,
    y: createPlotScale([0, 1], [box.bottom, box.top]),
    series,
  };
}

/** Conversion against temperature, or of holds against time; one curve a scan and event. */
export function ConversionPlot(props: { layout: CurveLayout; instruments: readonly string[] }) {
  const { layout, instruments } = props;
  const { box, x, xLabel, y, series } = layout;
  const halves = series.map((s) => s.y.findIndex((alpha) => alpha >= MARKED_CONVERSION));
  return (
    <PlotFrame box={box} x={x} y={y} xLabel={xLabel} yLabel="Conversion α">
      {series.map((s) => (
        <path
          key={`${s.scan_id} ${s.name}`}
          class={`curve hue-${instruments.indexOf(s.instrument ?? '') % 6}`}
          d={linePath(s.x, s.y, x, y)}
        />
      ))}
      {series.map((s, i) =>
        halves[i] < 0 ? null : (
          <g key={`${s.scan_id} ${s.name}`} class="small-mark">
            <InstrumentMark
              instrument={instruments.indexOf(s.instrument ?? '')}
              look="full"
              x={x.at(s.x[halves[i]])}
              y={y.at(MARKED_CONVERSION)}
            />
          </g>
        ),
      )}
    </PlotFrame>
  );
}
