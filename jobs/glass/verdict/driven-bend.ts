import type { SharedLaw } from '../../../schema/wire/shared-law.ts';
import { studentQuantile } from '../../numeric/distributions.ts';
import { localEnergyOf } from '../shared-law-values.ts';
import type { LawData, LawFit } from './law-fit.ts';
import { type Combination, effectiveDegrees } from './scatter.ts';

/** A bend and its 99 % half width. */
export interface DrivenBend {
  bend: number;
  halfWidth99: number;
}

/**
 * ln(E_loc at the lowest measured temperature / at the highest) of a law with the driving force: to what the mobility bends comes what the
 * driving force takes off, which the bend of a law without it misses by a tenth where the fastest scans come near melting.
 * @param fit with a free bend   @param inflation factor on Student's t for the estimated weights
 */
export function drivenBend(
  law: SharedLaw,
  d: LawData,
  fit: LawFit,
  scatterDegrees: Float64Array,
  inflation: number,
): DrivenBend {
  const ends = [law.lowestMeasuredK, law.highestMeasuredK].map((T) => {
    const whole = localEnergyOf(law, T);
    const part = localEnergyOf({ ...law, driving: undefined }, T) / whole;
    return { whole, part, u: (1 / T - d.scale.x0) / d.scale.dx };
  });
  const [low, high] = ends;
  // d ln E/d(ln E0, q) at each end: only the bent part moves.
  const of: Combination = [
    [1, low.part - high.part],
    [2, low.part * low.u - high.part * high.u],
  ];
  const { inverse, layout } = fit;
  let variance = inverse ? 0 : Number.NaN;
  if (inverse) for (const [a, v] of of) for (const [b, w] of of) variance += v * w * inverse[a * layout.p + b];
  const t = studentQuantile(0.995, effectiveDegrees(d, fit, of, scatterDegrees));
  return { bend: Math.log(low.whole / high.whole), halfWidth99: t * inflation * Math.sqrt(variance) };
}
