import { formatPowerOfTen, type Units } from '../format.ts';
import type { Curves } from '../model/curves.ts';
import { bandPath, linePath } from './curve-path.ts';
import { InstrumentKey, InstrumentMark } from './instrument-mark.tsx';
import { createPlotBox, labelWidth, type PlotBox, PlotFrame } from './plot-frame.tsx';
import { createPlotScale, createTemperatureScale, extent, type PlotScale } from './plot-scale.ts';

export interface CurvePlotLayout {
  box: PlotBox;
  x: PlotScale;
  y: PlotScale;
  curves: Curves;
  xLabel: string;
}

const HEIGHT = 320;
/** A positive quantity that spans more than this many decades is drawn on a logarithmic axis. */
const LINEAR_DECADES = 1.5;

function createScale(values: number[], range: [number, number]): PlotScale {
  const isLogarithmic = values.length === 2 && values[0] > 0 && Math.log10(values[1] / values[0]) > LINEAR_DECADES;
  if (!isLogarithmic) return createPlotScale(values, range);
  const scale = createPlotScale(values, range, { shown: Math.log10, hidden: (log) => 10 ** log });
  const first = Math.ceil(Math.log10(scale.valueAt(range[0])));
  const last = Math.floor(Math.log10(scale.valueAt(range[1])));
  const step = Math.max(1, Math.ceil((last - first) / 8));
  const ticks = [];
  for (let exponent = first; exponent <= last; exponent += step)
    ticks.push({ at: scale.at(10 ** exponent), label: formatPowerOfTen(exponent) });
  return { ...scale, ticks };
}

const axisName = ({ quantity, unit }: { quantity: string; unit: string }): string =>
  `${quantity.charAt(0).toUpperCase()}${quantity.slice(1)}${unit === '' || unit === '1' ? '' : `, ${unit}`}`;

/** Any curves with their own quantities, e.g. growth rate, viscosity or times of transformation; logarithmic where they span decades. */
export function layoutCurvePlot(curves: Curves, width: number, units: Units): CurvePlotLayout {
  const ys = extent(...curves.series.flatMap((s) => [s.y, s.lower ?? [], s.upper ?? []]));
  const isTemperature = curves.x.quantity === 'temperature' && curves.x.unit === 'K';
  const xs = extent(...curves.series.map((s) => s.x));
  const ruler = createScale(ys, [HEIGHT, 0]);
  const box = createPlotBox(width, HEIGHT, Math.max(34, labelWidth(ruler) + 10));
  return {
    box,
    x: isTemperature
      ? createTemperatureScale(xs, [box.left, box.right], units)
      : createScale(xs, [box.left, box.right]),
    y: createScale(ys, [box.bottom, box.top]),
    curves,
    xLabel: isTemperature ? `Temperature, ${units.temperature}` : axisName(curves.x),
  };
}

/** Series of an instrument are marks, the others lines told apart by their dashes and named at their end. */
export function CurvePlot({ layout, instruments }: { layout: CurvePlotLayout; instruments: readonly string[] }) {
  const { box, x, y, curves, xLabel } = layout;
  const lines = curves.series.filter((s) => s.instrument === undefined);
  return (
    <PlotFrame box={box} x={x} y={y} xLabel={xLabel} yLabel={axisName(curves.y)}>
      {lines.map((s) =>
        s.lower && s.upper ? (
          <path key={`band ${s.name}`} class="band" d={bandPath(s.x, s.lower, s.upper, x, y)} />
        ) : null,
      )}
      {lines.map((s, i) => (
        <path key={s.name} class={`law dash-${i % 4}`} d={linePath(s.x, s.y, x, y)} />
      ))}
      {curves.series.map((s) =>
        s.instrument === undefined
          ? null
          : s.x.map((value, i) => (
              <InstrumentMark
                key={`${s.name} ${value}`}
                instrument={instruments.indexOf(s.instrument ?? '')}
                look="full"
                x={x.at(value)}
                y={y.at(s.y[i])}
              />
            )),
      )}
    </PlotFrame>
  );
}

/** What a law of a Kissinger plot is called beside its dash. */
export const lawName = ({ rest }: { rest: string }): string => (rest === 'fit' ? 'one straight line' : rest);

/** What hollow and full marks of a Kissinger plot mean. */
export function CorrectionKeys() {
  return (
    <>
      <li class="muted-key">
        <InstrumentKey instrument={0} look="hollow" /> as measured
      </li>
      <li class="muted-key">
        <InstrumentKey instrument={0} /> lag removed
      </li>
    </>
  );
}

/** Names of the laws of a plot with their dashes. */
export function LawKeys({ names }: { names: readonly string[] }) {
  return (
    <>
      {names.map((name, i) => (
        <li key={name}>
          <svg class="law-key" width="34" height="10" viewBox="0 0 34 10" aria-hidden="true">
            <path class={`law dash-${i % 4}`} d="M1 5H33" />
          </svg>
          {name}
        </li>
      ))}
    </>
  );
}
