import { labelTicks } from './plot-scale.ts';
import { linearScale, roundTicks } from './scales.ts';

/** A linear scale shared by the rows of one small interval plot. */
export interface IntervalScale {
  width: number;
  x(value: number): number;
  ticks: { x: number; label: string }[];
}

const PADDING = 16;
/** Generous width of one digit of a tick label, and the room between two labels, px. */
const DIGIT_WIDTH = 7.5;
const LABEL_ROOM = 6;

/** Covers every value; intervals too, unless one is so wide that it would squeeze the rest (then it runs out of the plot). */
export function createIntervalScale(
  rows: readonly { value: number; lower95: number | null; upper95: number | null }[],
  width: number,
): IntervalScale {
  const values = rows.map((row) => row.value);
  const halves = rows.map((row) =>
    Math.max(row.value - (row.lower95 ?? row.value), (row.upper95 ?? row.value) - row.value),
  );
  const typical = [...halves].sort((a, b) => a - b)[Math.floor(halves.length / 2)] ?? 0;
  const reach = Math.max(3 * typical, 0.005 * Math.max(...values.map(Math.abs)));
  const low = Math.min(...rows.map((row, i) => row.value - Math.min(halves[i], reach)));
  const high = Math.max(...rows.map((row, i) => row.value + Math.min(halves[i], reach)));
  const { at } = linearScale([low, high], [PADDING, width - PADDING]);
  // Fewer ticks until their labels have room.
  for (let count = 4; ; count--) {
    const ticks = labelTicks(roundTicks(low, high, count)).map(({ value, label }) => ({ x: at(value), label }));
    const room = ticks.length > 1 ? ticks[1].x - ticks[0].x : width;
    const wanted = Math.max(...ticks.map(({ label }) => label.length)) * DIGIT_WIDTH + LABEL_ROOM;
    if (room >= wanted || count === 1) return { width, x: at, ticks };
  }
}

const HEIGHT = 24;

/** One value with its interval on a shared scale; an end that leaves the plot is an arrow. */
export function IntervalMark(props: {
  scale: IntervalScale;
  value: number;
  lower95: number | null;
  upper95: number | null;
}) {
  const { scale, value, lower95, upper95 } = props;
  const clamp = (x: number): number => Math.min(scale.width - 1, Math.max(1, x));
  const mid = HEIGHT / 2;
  const left = clamp(scale.x(lower95 ?? value));
  const right = clamp(scale.x(upper95 ?? value));
  return (
    <svg
      class="interval-mark"
      width={scale.width}
      height={HEIGHT}
      viewBox={`0 0 ${scale.width} ${HEIGHT}`}
      aria-hidden="true"
    >
      {scale.ticks.map(({ x }) => (
        <path key={x} class="grid-step" d={`M${x.toFixed(1)} 0V${HEIGHT}`} />
      ))}
      <path class="interval-line" d={`M${left.toFixed(1)} ${mid}H${right.toFixed(1)}`} />
      {left === 1 && <path class="interval-line" d={`M6 ${mid - 4}L1 ${mid}L6 ${mid + 4}`} />}
      {right === scale.width - 1 && (
        <path
          class="interval-line"
          d={`M${scale.width - 6} ${mid - 4}L${scale.width - 1} ${mid}L${scale.width - 6} ${mid + 4}`}
        />
      )}
      <path class="interval-value" d={`M${scale.x(value).toFixed(1)} ${mid - 6}v12`} />
    </svg>
  );
}

/** Tick labels below a column of interval marks. */
export function IntervalAxis({ scale }: { scale: IntervalScale }) {
  return (
    <svg class="interval-mark" width={scale.width} height={18} viewBox={`0 0 ${scale.width} 18`} aria-hidden="true">
      {scale.ticks.map(({ x, label }) => (
        <text key={label} class="axis-label" x={x} y={12} text-anchor="middle">
          {label}
        </text>
      ))}
    </svg>
  );
}
