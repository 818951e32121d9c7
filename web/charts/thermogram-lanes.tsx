import { formatRate, formatTemperature, type Units } from '../format.ts';
import type { CurveSeries, ScanLane } from '../model/curves.ts';
import { linePath } from './curve-path.ts';
import { InstrumentMark } from './instrument-mark.tsx';
import { createPlotBox, type PlotBox, PlotFrame } from './plot-frame.tsx';
import { createHoldsScale, createLaneScale, createPlotScale, extent, type PlotScale } from './plot-scale.ts';

export interface PlacedLane {
  lane: ScanLane;
  y: PlotScale;
  /** px of the middle of the lane's own band */
  middle: number;
  path: string;
  baselinePath: string;
  /** px of each event's peak */
  peaks: { x: number; y: number }[];
}

export interface LaneLayout {
  box: PlotBox;
  x: PlotScale;
  xLabel: string;
  laneHeight: number;
  /** Slowest first, at the foot */
  placed: PlacedLane[];
}

const TALLEST_LANE = 46;
const SHORTEST_LANE = 15;
const ALL_LANES = 620;
const LABEL_WIDTH = 108;
const NARROW_LABEL_WIDTH = 82;
/** A curve may rise into the lane above by this share of a lane. */
const OVERLAP = 0.5;

/**
 * Each scan in a lane of its own, slowest at the foot, every one scaled to its own height on one axis: of temperature, or of time where
 * all are holds.
 */
export function layoutLanes(lanes: readonly ScanLane[], width: number, units: Units): LaneLayout {
  const laneHeight = Math.max(SHORTEST_LANE, Math.min(TALLEST_LANE, ALL_LANES / Math.max(1, lanes.length)));
  const top = 26 + laneHeight * OVERLAP;
  const left = width < 480 ? NARROW_LABEL_WIDTH : LABEL_WIDTH;
  const box = { ...createPlotBox(width, top + lanes.length * laneHeight + 44, left, 26) };
  const areHolds = lanes.length > 0 && lanes.every((lane) => lane.holdK !== undefined);
  const shown = areHolds ? trimHolds(lanes) : lanes;
  const range: [number, number] = [box.left, box.right];
  const values = extent(...shown.map((lane) => lane.trace.x));
  const { scale: x, label: xLabel } = areHolds
    ? createHoldsScale(values, range)
    : createLaneScale(shown[0], values, range, units);
  const placed = shown.map((lane, i): PlacedLane => {
    const foot = box.bottom - 4 - i * laneHeight;
    const y = createPlotScale(extent(lane.trace.y), [foot, foot - laneHeight * (1 + OVERLAP)]);
    return {
      lane,
      y,
      middle: foot - laneHeight / 2,
      path: linePath(lane.trace.x, lane.trace.y, x, y),
      baselinePath: lane.baseline ? linePath(lane.baseline.x, lane.baseline.y, x, y) : '',
      peaks: lane.rows.flatMap((row) =>
        row.peak_K === null || lane.holdK !== undefined ? [] : [peakOf(lane, row.peak_K, x, y)],
      ),
    };
  });
  return { box, x, xLabel, laneHeight, placed };
}

/** First moments of a hold, left out of the logarithmic axis: this share of the shortest. */
const FIRST_MOMENTS = 1 / 60;

/** Holds from the first time that all of them show. */
function trimHolds(lanes: readonly ScanLane[]): ScanLane[] {
  const startS = FIRST_MOMENTS * Math.min(...lanes.map((lane) => lane.trace.x.at(-1) ?? 1));
  const trim = (series: CurveSeries): CurveSeries => ({
    ...series,
    x: series.x.filter((timeS) => timeS >= startS),
    y: series.y.filter((_, i) => series.x[i] >= startS),
  });
  return lanes.map((lane) => ({ ...lane, trace: trim(lane.trace), baseline: lane.baseline && trim(lane.baseline) }));
}

/** The point of the trace nearest to a peak's temperature: the trace itself may be a hair off by smoothing. */
function peakOf(lane: ScanLane, peakK: number, x: PlotScale, y: PlotScale): { x: number; y: number } {
  let nearest = 0;
  lane.trace.x.forEach((temperatureK, i) => {
    if (Math.abs(temperatureK - peakK) < Math.abs(lane.trace.x[nearest] - peakK)) nearest = i;
  });
  return { x: x.at(peakK), y: y.at(lane.trace.y[nearest] ?? 0) };
}

function laneName({ holdK, rateKPerS, isCooling }: ScanLane, units: Units): string {
  if (holdK !== undefined) return `at ${formatTemperature(holdK, units)}`;
  if (rateKPerS === null) return 'no rate';
  return `${formatRate(rateKPerS, units)}${isCooling ? ' ↓' : ''}`;
}

/** Ground, curves, baselines and peaks of all lanes. */
export function ThermogramLanes(props: { layout: LaneLayout; instruments: readonly string[]; units: Units }) {
  const { layout, instruments, units } = props;
  const { box, x, xLabel, placed } = layout;
  return (
    <PlotFrame box={box} x={x} xLabel={xLabel} yLabel="Heat flow, exothermic up">
      {placed.map(({ lane, path, baselinePath, peaks, middle }) => {
        const instrument = instruments.indexOf(lane.instrument);
        return (
          <g key={lane.key} class={`lane hue-${instrument % 6}`}>
            <path class="curve" d={path} />
            {baselinePath && <path class="baseline" d={baselinePath} />}
            {peaks.map((peak) => (
              <path key={peak.x} class="peak-tick" d={`M${peak.x.toFixed(1)} ${(peak.y - 3).toFixed(1)}v-7`} />
            ))}
            <InstrumentMark instrument={instrument} look="full" x={9} y={middle} />
            <text class="lane-label" x={22} y={(middle + 4).toFixed(1)}>
              {laneName(lane, units)}
            </text>
          </g>
        );
      })}
    </PlotFrame>
  );
}
