import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { CONVERSION_COUNT, CONVERSIONS, type EventColumns } from '../event-data.ts';
import { REACTION_MODELS } from './reaction-models.ts';

const COUNT = REACTION_MODELS.length;
/** ln f(α), model-major over the 19 conversions. */
const LN_F = Float64Array.from(REACTION_MODELS.flatMap((m) => CONVERSIONS.map((a) => Math.log(m.rate(a)))));

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
  let total = 0;
  let sw = 0;
  for (let j = 0; j < curves.length; j++) {
    const at = curves[j] * CONVERSION_COUNT;
    let mx = 0;
    let mr = 0;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      mx += 1 / d.temperatureK[at + k] / CONVERSION_COUNT;
      mr += d.lnRate[at + k] / CONVERSION_COUNT;
    }
    let xx = 0;
    let xr = 0;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const x = 1 / d.temperatureK[at + k] - mx;
      xx += x * x;
      xr += x * (d.lnRate[at + k] - mr);
    }
    let sE = 0;
    let sA = 0;
    let sEE = 0;
    let sEA = 0;
    for (let f = 0; f < COUNT; f++) {
      let mf = 0;
      let xf = 0;
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const v = LN_F[f * CONVERSION_COUNT + k];
        mf += v / CONVERSION_COUNT;
        xf += (1 / d.temperatureK[at + k] - mx) * v;
      }
      const E = (-GAS_CONSTANT * (xr - xf)) / xx / energy;
      const lnA = mr - mf + (E * energy * mx) / GAS_CONSTANT;
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
