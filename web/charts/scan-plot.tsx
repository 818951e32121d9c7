import { formatExponent, formatTemperature, type Units } from '../format.ts';
import type { ScanLane } from '../model/curves.ts';
import { linePath } from './curve-path.ts';
import { createPlotBox, labelWidth, type PlotBox, PlotFrame } from './plot-frame.tsx';
import { createPlotScale, createTemperatureScale, extent, type PlotScale } from './plot-scale.ts';

export interface ScanPlotLayout {
  box: PlotBox;
  x: PlotScale;
  y: PlotScale;
  /** Ten to the power of this is taken out of the labels of y */
  exponent: number;
}

const HEIGHT = 320;
/** Labels of neighbouring temperatures stand in rows above the curve. */
const LABEL_ROWS = 3;
const LABEL_STEP = 14;

/** Limits of the analysed event(s), K: where the baseline begins and ends. */
export function eventLimits(lane: ScanLane): [number, number] | undefined {
  const limits = lane.baseline && extent(lane.baseline.x);
  return limits?.length === 2 ? [limits[0], limits[1]] : undefined;
}

/** One scan at full height with its axis of heat flow: the whole segment, or the event with some ground at both sides. */
export function layoutScanPlot(lane: ScanLane, width: number, units: Units, isZoomed: boolean): ScanPlotLayout {
  const limits = eventLimits(lane);
  const room = limits ? 0.6 * (limits[1] - limits[0]) : 0;
  const [low, high] =
    isZoomed && limits ? [limits[0] - room, limits[1] + room] : [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
  const shown = lane.trace.x.map((temperatureK) => temperatureK >= low && temperatureK <= high);
  const xs = lane.trace.x.filter((_, i) => shown[i]);
  const ys = extent(lane.trace.y.filter((_, i) => shown[i]));
  const size = Math.max(...ys.map(Math.abs), Number.MIN_VALUE);
  const exponent = 3 * Math.floor(Math.log10(size) / 3);
  const factor = 10 ** -exponent;
  const options = { count: 5, shown: (value: number) => value * factor, hidden: (value: number) => value / factor };
  const ruler = createPlotScale(ys, [HEIGHT, 0], options);
  const box = createPlotBox(width, HEIGHT, labelWidth(ruler) + 10, 26 + LABEL_ROWS * LABEL_STEP);
  return {
    box,
    x: createTemperatureScale(extent(xs), [box.left, box.right], units),
    y: createPlotScale(ys, [box.bottom, box.top], options),
    exponent,
  };
}

/** Trace, baseline, limits and characteristic temperatures of one scan. */
export function ScanPlot(props: { lane: ScanLane; layout: ScanPlotLayout; instrument: number; units: Units }) {
  const { lane, layout, instrument, units } = props;
  const { box, x, y, exponent } = layout;
  const limits = eventLimits(lane);
  const labelY = (i: number): number => box.top - 6 - (LABEL_ROWS - 1 - (i % LABEL_ROWS)) * LABEL_STEP;
  const isInside = (at: number): boolean => at >= box.left && at <= box.right;
  const marks = lane.rows.flatMap((row) => [
    ...(row.event === lane.rows[0].event ? [{ name: 'glass transition', temperatureK: row.glass_transition_K }] : []),
    { name: 'onset', temperatureK: row.onset_K },
    { name: 'peak', temperatureK: row.peak_K },
    { name: 'end', temperatureK: row.end_K },
  ]);
  const drawn = marks
    .flatMap(({ name, temperatureK }) =>
      temperatureK === null ? [] : [{ name, temperatureK, at: x.at(temperatureK) }],
    )
    .filter(({ at }) => isInside(at))
    .sort((a, b) => a.at - b.at);
  return (
    <PlotFrame
      box={box}
      x={x}
      y={y}
      xLabel={`Temperature, ${units.temperature}`}
      yLabel={`Heat flow, ${exponent === 0 ? '' : `${formatExponent(exponent)} `}W or W/kg as in the file, exothermic up`}
    >
      <g class={`lane hue-${instrument % 6}`}>
        {limits && (
          <path
            class="limits"
            d={`M${clamp(x.at(limits[0]), box)} ${box.top}V${box.bottom}H${clamp(x.at(limits[1]), box)}V${box.top}Z`}
          />
        )}
        <path class="curve" d={clippedPath(lane.trace, layout)} />
        {lane.baseline && <path class="baseline" d={clippedPath(lane.baseline, layout)} />}
      </g>
      {drawn.map(({ name, temperatureK, at }, i) => (
        <g key={`${name} ${temperatureK}`}>
          <path class="temperature-line" d={`M${at.toFixed(1)} ${labelY(i) + 4}V${box.bottom}`} />
          <text
            class="plot-label"
            x={at.toFixed(1)}
            y={labelY(i)}
            text-anchor={at > box.right - 110 ? 'end' : at < box.left + 60 ? 'start' : 'middle'}
          >
            {name} {formatTemperature(temperatureK, units)}
          </text>
        </g>
      ))}
    </PlotFrame>
  );
}

const clamp = (at: number, box: PlotBox): string => Math.min(box.right, Math.max(box.left, at)).toFixed(1);

function clippedPath(curve: { x: number[]; y: number[] }, { box, x, y }: ScanPlotLayout): string {
  const kept = curve.x.map((value) => x.at(value) >= box.left && x.at(value) <= box.right);
  return linePath(
    curve.x.filter((_, i) => kept[i]),
    curve.y.filter((_, i) => kept[i]),
    x,
    y,
  );
}
