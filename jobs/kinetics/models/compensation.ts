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

const MEAN_OF_ALL = mean(MEAN_LN_F);

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
      mx += x[k];
      mr += d.lnRate[at + k];
    }
    mx /= CONVERSION_COUNT;
    mr /= CONVERSION_COUNT;
    let xx = 0;
    let xr = 0;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      x[k] -= mx;
      xx += x[k] * x[k];
      xr += x[k] * d.lnRate[at + k];
    }
    // Pairs (E/energy, ln A) go with Σ x ln f of their model by one factor: their sums follow from those of Σ x ln f.
    const perSum = GAS_CONSTANT / (xx * energy);
    let sE = 0;
    let sEE = 0;
    let sEf = 0;
    for (let f = 0; f < COUNT; f++) {
      const from = f * CONVERSION_COUNT;
      let even = x[0] * LN_F[from];
      let odd = 0;
      for (let k = 1; k < CONVERSION_COUNT; k += 2) {
        odd += x[k] * LN_F[from + k];
        even += x[k + 1] * LN_F[from + k + 1];
      }
      const E = (even + odd - xr) * perSum;
      sE += E;
      sEE += E * E;
      sEf += E * MEAN_LN_F[f];
    }
    sE /= COUNT;
    sEE /= COUNT;
    const perE = (energy * mx) / GAS_CONSTANT;
    const sA = mr - MEAN_OF_ALL + perE * sE;
    const sEA = mr * sE - sEf / COUNT + perE * sEE;
    const slope = (sEA - sE * sA) / (sEE - sE * sE);
    total += weights[j] * (sA + slope * (1 - sE));
    sw += weights[j];
  }
  return total / sw;
}
