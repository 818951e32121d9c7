import { formatExponent, formatTemperature, type Units } from '../format.ts';
import type { ScanLane } from '../model/curves.ts';
import { linePath } from './curve-path.ts';
import { createPlotBox, labelWidth, type PlotBox, PlotFrame } from './plot-frame.tsx';
import { createLaneScale, createPlotScale, extent, type PlotScale } from './plot-scale.ts';

export interface ScanPlotLayout {
  box: PlotBox;
  x: PlotScale;
  xLabel: string;
  y: PlotScale;
  /** Ten to the power of this is taken out of the labels of y */
  exponent: number;
}

const HEIGHT = 320;
/** Labels stand in two rows an event above the curve, the peak over its onset and end; on a narrow figure each in its own row. */
const LABEL_STEP = 14;
const NARROW = 480;
const rowsPerEvent = (width: number): number => (width < NARROW ? 4 : 2);
const labelRows = (lane: ScanLane, width: number): number => rowsPerEvent(width) * Math.max(1, lane.rows.length);
const LABEL_WIDTH = 104;

/** Limits of the analysed event(s) where the baseline begins and ends: K, of a hold s from its start. */
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
  const box = createPlotBox(width, HEIGHT, labelWidth(ruler) + 10, 26 + labelRows(lane, width) * LABEL_STEP);
  const { scale: x, label: xLabel } = createLaneScale(lane, extent(xs), [box.left, box.right], units);
  return {
    box,
    x,
    xLabel,
    y: createPlotScale(ys, [box.bottom, box.top], options),
    exponent,
  };
}

/** Units with a name of their own, by the power of ten taken out. */
const NAMED_UNITS: Record<string, Record<number, string>> = {
  W: { [-9]: 'nW', [-6]: 'µW', [-3]: 'mW', 0: 'W' },
  'W/kg': { [-3]: 'mW/kg', 0: 'W/kg', 3: 'W/g', 6: 'kW/g' },
};

const heatFlowUnit = (exponent: number, unit = ''): string =>
  NAMED_UNITS[unit]?.[exponent] ?? [exponent === 0 ? '' : formatExponent(exponent), unit].filter(Boolean).join(' ');

interface Label {
  name: string;
  temperatureK: number | null;
  row: number;
  side: 'start' | 'middle' | 'end';
}

/** Trace, baseline, limits and characteristic temperatures of one scan. */
export function ScanPlot(props: { lane: ScanLane; layout: ScanPlotLayout; instrument: number; units: Units }) {
  const { lane, layout, instrument, units } = props;
  const { box, x, xLabel, y, exponent } = layout;
  const limits = eventLimits(lane);
  const isInside = (at: number): boolean => at >= box.left && at <= box.right;
  const rows = rowsPerEvent(box.width);
  // Along a hold the temperatures of an event have no place of their own.
  const told = lane.holdK === undefined ? lane.rows : [];
  const labels = told
    .flatMap((row, i): Label[] => [
      { name: 'peak', temperatureK: row.peak_K, row: rows * i, side: 'middle' },
      { name: 'onset', temperatureK: row.onset_K, row: rows * i + 1, side: 'end' },
      { name: 'end', temperatureK: row.end_K, row: rows * i + (rows === 2 ? 1 : 2), side: 'start' },
      {
        name: 'glass transition',
        temperatureK: i === 0 ? row.glass_transition_K : null,
        row: rows * i + rows - 1,
        side: 'middle',
      },
    ])
    .flatMap((label) => {
      if (label.temperatureK === null) return [];
      const at = x.at(label.temperatureK);
      const y = box.top - 6 - (labelRows(lane, box.width) - 1 - label.row) * LABEL_STEP;
      const text = `${label.name} ${formatTemperature(label.temperatureK, units)}`;
      const side = at < box.left + LABEL_WIDTH ? 'start' : at > box.right - LABEL_WIDTH ? 'end' : label.side;
      return isInside(at) ? [{ at, y, text, side }] : [];
    });
  return (
    <PlotFrame
      box={box}
      x={x}
      y={y}
      xLabel={xLabel}
      yLabel={`Heat flow, ${heatFlowUnit(exponent, lane.trace.unit)}, exothermic up`}
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
      {labels.map(({ at, y: labelY, text, side }) => (
        <g key={text}>
          <path class="temperature-line" d={`M${at.toFixed(1)} ${labelY + 4}V${box.bottom}`} />
          <text class="plot-label" x={at.toFixed(1)} y={labelY} text-anchor={side}>
            {text}
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
