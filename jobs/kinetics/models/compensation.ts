import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { mean } from '../../numeric/statistics.ts';
import { CONVERSION_COUNT, CONVERSIONS, type EventColumns } from '../event-data.ts';
import { REACTION_MODELS } from './reaction-models.ts';

const COUNT = REACTION_MODELS.length;
/** ln f(α), model-major over the 19 conversions. */
const LN_F = Float64Array.from(REACTION_MODELS.flatMap((m) => CONVERSIONS.map((a) => Math.log(m.rate(a)))));
const MEAN_LN_F = Float64Array.from({ length: COUNT }, (_, f) =>
  mean(LN_F.subarray(f * CONVERSION_COUNT, (f + 1) * CONVERSION_COUNT)),
);

/**
 * ln A at a model-free E by the compensation line (ICTAC 2011, section 5): each model's line ln[(dα/dt)/f(α)] = ln A − E/(R T) on one
 * scan gives a pair (E, ln A); the pairs of all models lie on ln A = a + b E, whichever model holds, and the line is read at the
 * isoconversional E. Mean over the scans, weighted.
 * @param energy J/mol   @returns ln A, A in 1/s
 */
export function compensationLnPrefactor(
  d: EventColumns,
  curves: ArrayLike<number>,
  weights: ArrayLike<number>,
  energy: number,
): number {
  const x = new Float64Array(CONVERSION_COUNT);
  let total = 0;
  let sw = 0;
  for (let j = 0; j < curves.length; j++) {
    const at = curves[j] * CONVERSION_COUNT;
    let mx = 0;
    let mr = 0;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      x[k] = 1 / d.temperatureK[at + k];
      mx += x[k] / CONVERSION_COUNT;
      mr += d.lnRate[at + k] / CONVERSION_COUNT;
    }
    let xx = 0;
    let xr = 0;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      x[k] -= mx;
      xx += x[k] * x[k];
      xr += x[k] * d.lnRate[at + k];
    }
    let sE = 0;
    let sA = 0;
    let sEE = 0;
    let sEA = 0;
    for (let f = 0; f < COUNT; f++) {
      let xf = 0;
      for (let k = 0; k < CONVERSION_COUNT; k++) xf += x[k] * LN_F[f * CONVERSION_COUNT + k];
      const E = (-GAS_CONSTANT * (xr - xf)) / xx / energy;
      const lnA = mr - MEAN_LN_F[f] + (E * energy * mx) / GAS_CONSTANT;
      sE += E / COUNT;
      sA += lnA / COUNT;
      sEE += (E * E) / COUNT;
      sEA += (E * lnA) / COUNT;
    }
    const slope = (sEA - sE * sA) / (sEE - sE * sE);
    total += weights[j] * (sA + slope * (1 - sE));
    sw += weights[j];
  }
  return total / sw;
}
