import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { bandOf, expFinite } from './band.ts';
import { beyondMeasured, DIAGRAM_CONVERSIONS, type DiagramLine, drawsOf } from './diagram-line.ts';
import { instancesOf } from './instances.ts';

const DIAGRAM_POINTS = 81;
/** A diagram without an asked range reaches this far below and above the measured temperatures, K. */
const MARGIN_K = { below: 80, above: 40 };

const evenly = (from: number, to: number, count: number): Float64Array =>
  Float64Array.from({ length: count }, (_, i) => from + ((to - from) * i) / (count - 1));

/**
 * Time–temperature–transformation: time in s (y) to each conversion at constant temperature in K (x), by every method of the source. With melting data the line
 * of the shared law turns back at its nose, and the grid runs up to melting.
 */
export function drawTransformation(
  source: ForecastSource,
  conversions: readonly number[] = DIAGRAM_CONVERSIONS,
  rangeK: readonly [number, number] = defaultRange(source),
): DiagramLine[] {
  const grid = evenly(rangeK[0], rangeK[1], DIAGRAM_POINTS);
  return instancesOf(source).flatMap((m) =>
    conversions.map((conversion): DiagramLine => {
      const draws = drawsOf(m.draws.length).map((d) => m.draws[d]);
      const pessimistic = m.pessimistic;
      const rows = Array.from(grid, (T) => {
        const drawn = draws.map((k) => k.lnTime(conversion, T));
        const band = bandOf(m.estimate.lnTime(conversion, T), drawn, m.degreesOfFreedom);
        if (pessimistic && T < pessimistic.belowK)
          band.lower = Math.min(band.lower ?? band.value, pessimistic.kinetics.lnTime(conversion, T));
        return [band.value, band.lower ?? band.value, band.upper ?? band.value];
      });
      const kept = rows.flatMap((row, i) => (row.every(Number.isFinite) ? [i] : []));
      const column = (j: number) => Float64Array.from(kept, (i) => expFinite(rows[i][j]));
      const x = Float64Array.from(kept, (i) => grid[i]);
      return {
        method: m.method,
        conversion,
        x,
        y: column(0),
        lower: column(1),
        upper: column(2),
        beyondMeasuredK: x.map((T) => beyondMeasured(source, T)),
      };
    }),
  );
}

function defaultRange({ lowestMeasuredK, highestMeasuredK, melting }: ForecastSource): readonly [number, number] {
  const low = Math.max(lowestMeasuredK / 2, lowestMeasuredK - MARGIN_K.below);
  return [low, melting ? melting.meltingK - 0.5 : highestMeasuredK + MARGIN_K.above];
}
