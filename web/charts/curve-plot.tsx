import { formatPowerOfTen, rateInUnit, type Units } from '../format.ts';
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
  yLabel: string;
}

const HEIGHT = 320;
/** A positive quantity that spans more than this many decades is drawn on a logarithmic axis. */
const LINEAR_DECADES = 1.5;

/** @param factor from the unit of the data to the one shown */
function createScale(values: number[], range: [number, number], factor = 1): PlotScale {
  const isLogarithmic = values.length === 2 && values[0] > 0 && Math.log10(values[1] / values[0]) > LINEAR_DECADES;
  if (!isLogarithmic)
    return createPlotScale(values, range, { shown: (v) => v * factor, hidden: (shown) => shown / factor });
  const scale = createPlotScale(values, range, {
    shown: (v) => Math.log10(v * factor),
    hidden: (log) => 10 ** log / factor,
  });
  const first = Math.ceil(Math.log10(scale.valueAt(range[0]) * factor));
  const last = Math.floor(Math.log10(scale.valueAt(range[1]) * factor));
  const step = Math.max(1, Math.ceil((last - first) / 8));
  const ticks = [];
  for (let exponent = first; exponent <= last; exponent += step)
    ticks.push({ at: scale.at(10 ** exponent / factor), label: formatPowerOfTen(exponent) });
  return { ...scale, ticks };
}

const axisName = ({ quantity, unit }: { quantity: string; unit: string }): string =>
  `${quantity.charAt(0).toUpperCase()}${quantity.slice(1)}${unit === '' || unit === '1' ? '' : `, ${unit}`}`;

type Axis = Curves['x'];

const isTemperature = ({ quantity, unit }: Axis): boolean => quantity === 'temperature' && unit === 'K';
const isRate = ({ quantity, unit }: Axis): boolean => quantity === 'heating rate' && unit === 'K/s';

function scaleOf(axis: Axis, values: number[], range: [number, number], units: Units): PlotScale {
  if (isTemperature(axis)) return createTemperatureScale(values, range, units);
  return createScale(values, range, isRate(axis) ? rateInUnit(1, units) : 1);
}

function nameOf(axis: Axis, units: Units): string {
  if (isTemperature(axis)) return `Temperature, ${units.temperature}`;
  return axisName(isRate(axis) ? { ...axis, unit: units.rate } : axis);
}

/** Any curves with their own quantities, e.g. growth rate, viscosity or times of transformation; logarithmic where they span decades. */
export function layoutCurvePlot(curves: Curves, width: number, units: Units): CurvePlotLayout {
  const ys = extent(...curves.series.flatMap((s) => [s.y, s.lower ?? [], s.upper ?? []]));
  const xs = extent(...curves.series.map((s) => s.x));
  const ruler = scaleOf(curves.y, ys, [HEIGHT, 0], units);
  const box = createPlotBox(width, HEIGHT, Math.max(34, labelWidth(ruler) + 10));
  return {
    box,
    x: scaleOf(curves.x, xs, [box.left, box.right], units),
    y: scaleOf(curves.y, ys, [box.bottom, box.top], units),
    curves,
    xLabel: nameOf(curves.x, units),
    yLabel: nameOf(curves.y, units),
  };
}

/** Series of an instrument are marks, the others lines told apart by their dashes and named at their end. */
export function CurvePlot({ layout, instruments }: { layout: CurvePlotLayout; instruments: readonly string[] }) {
  const { box, x, y, curves, xLabel, yLabel } = layout;
  const lines = curves.series.filter((s) => s.instrument === undefined);
  return (
    <PlotFrame box={box} x={x} y={y} xLabel={xLabel} yLabel={yLabel}>
      {lines.map((s) =>
        s.lower && s.upper ? (
          <path key={`band ${s.name}`} class="band" d={bandPath(s.x, s.lower, s.upper, x, y)} />
        ) : null,
      )}
      {lines.map((s, i) => (
        <path key={s.name} class={`law dash-${i % 4}`} d={linePath(s.x, s.y, x, y)} />
      ))}
      {lines.map((s, i) => {
        const beyond = s.beyond_measured_K;
        if (!beyond) return null;
        const measured = s.y.map((value, k) => (beyond[k] === 0 ? value : Number.NaN));
        return <path key={s.name} class={`law measured dash-${i % 4}`} d={linePath(s.x, measured, x, y)} />;
      })}
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
