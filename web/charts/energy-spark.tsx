import { formatSignificant } from '../format.ts';
import { bandPath, linePath } from './curve-path.ts';
import { createPlotScale, extent } from './plot-scale.ts';

const WIDTH = 128;
const HEIGHT = 26;
/** The spark spans at least this share of the mean at both sides: the limit at which a change of E is worth a flag. */
const LEAST_SPAN = 0.1;

export interface EnergySeries {
  conversion: number[];
  value: number[];
  lower: number[];
  upper: number[];
}

/** E against conversion in the size of a word, over a range of at least ±10 % of its mean. */
export function EnergySpark({ series }: { series: EnergySeries }) {
  const { conversion, value, lower, upper } = series;
  const mean = value.reduce((sum, e) => sum + e, 0) / value.length;
  const x = createPlotScale([0, 1], [0, WIDTH]);
  const y = createPlotScale(extent(value, [mean * (1 - LEAST_SPAN), mean * (1 + LEAST_SPAN)]), [HEIGHT - 1, 1]);
  const from = formatSignificant(Math.min(...value));
  const to = formatSignificant(Math.max(...value));
  return (
    <svg
      class="energy-spark"
      width={WIDTH}
      height={HEIGHT}
      viewBox={`0 0 ${WIDTH} ${HEIGHT}`}
      role="img"
      aria-label={`E over conversion: ${from} to ${to} kJ/mol`}
    >
      <path class="grid-step" d={`M0 .5H${WIDTH}M0 ${HEIGHT - 0.5}H${WIDTH}`} />
      <path class="grid-decade" d={`M0 ${y.at(mean).toFixed(1)}H${WIDTH}`} />
      <path class="band" d={bandPath(conversion, lower, upper, x, y)} />
      <path class="curve curve-front" d={linePath(conversion, value, x, y)} />
    </svg>
  );
}
