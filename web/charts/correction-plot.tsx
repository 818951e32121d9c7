import { formatPowerOfTen, rateInUnit, type Units } from '../format.ts';
import { NORMAL_95 } from '../model/correction.ts';
import { bandPath, linePath } from './curve-path.ts';
import { createPlotBox, labelWidth, PlotFrame } from './plot-frame.tsx';
import { createPlotScale, extent, type PlotScale } from './plot-scale.ts';
import { logScale } from './scales.ts';

export interface Correction {
  offsetK: number;
  offsetSeK: number;
  lagS: number;
  lagSeS: number;
}

const HEIGHT = 260;
const POINTS = 60;

/**
 * What is taken off a temperature at a heating rate, offset + lag × rate, with its 95 % band; errors of offset and lag are
 * taken as independent.
 */
export function correctionCurve(correction: Correction, lowKPerS: number, highKPerS: number) {
  const rates = Array.from({ length: POINTS + 1 }, (_, i) => lowKPerS * (highKPerS / lowKPerS) ** (i / POINTS));
  const value = rates.map((rate) => correction.offsetK + correction.lagS * rate);
  const half = rates.map((rate) => NORMAL_95 * Math.hypot(correction.offsetSeK, correction.lagSeS * rate));
  return { rates, value, lower: value.map((v, i) => v - half[i]), upper: value.map((v, i) => v + half[i]) };
}

/** The correction of an instrument over the rates it ran, marked at each of them. */
export function CorrectionPlot(props: {
  correction: Correction;
  ratesKPerS: readonly number[];
  instrument: number;
  width: number;
  units: Units;
}) {
  const { correction, ratesKPerS, instrument, width, units } = props;
  const [lowest, highest] = extent(ratesKPerS);
  const low = lowest / 1.4;
  const high = highest * 1.4;
  const { rates, value, lower, upper } = correctionCurve(correction, low, high);
  const values = extent(lower, upper, [0]);
  const box = createPlotBox(width, HEIGHT, labelWidth(createPlotScale(values, [HEIGHT, 0])) + 10);
  const ends: [number, number] = [rateInUnit(low, units), rateInUnit(high, units)];
  const logarithmic = logScale(ends, [box.left, box.right]);
  const ticks: PlotScale['ticks'] = [];
  const [first, last] = ends.map(Math.log10);
  for (let exponent = Math.ceil(first); exponent <= last; exponent++)
    ticks.push({ at: logarithmic.at(10 ** exponent), label: formatPowerOfTen(exponent) });
  const x: PlotScale = {
    at: (rate) => logarithmic.at(rateInUnit(rate, units)),
    valueAt: (px) => (logarithmic.valueAt(px) * low) / rateInUnit(low, units),
    range: [box.left, box.right],
    ticks,
  };
  const y = createPlotScale(values, [box.bottom, box.top]);
  return (
    <svg
      class="plot-svg"
      width={box.width}
      height={box.height}
      role="img"
      aria-label={`Correction from ${value[0].toPrecision(3)} K at the slowest rate to ${value.at(-1)?.toPrecision(3)} K at the fastest`}
    >
      <PlotFrame box={box} x={x} y={y} xLabel={`Heating rate, ${units.rate}`} yLabel="Taken off the temperature, K">
        <path class="grid-decade" d={`M${box.left} ${y.at(0).toFixed(1)}H${box.right}`} />
        <path class="band" d={bandPath(rates, lower, upper, x, y)} />
        <path class={`curve curve-front hue-${instrument % 6}`} d={linePath(rates, value, x, y)} />
        {[...new Set(ratesKPerS)].map((rate) => (
          <path key={rate} class="peak-tick" d={`M${x.at(rate).toFixed(1)} ${box.bottom}v-7`} />
        ))}
      </PlotFrame>
    </svg>
  );
}
