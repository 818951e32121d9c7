import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import type { ArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { temperatureIntegralFactorFast } from '../../laws/temperature-integral.ts';
import { fitVyazovkin, type VyazovkinEstimate } from './vyazovkin.ts';

/**
 * Vyazovkin's form for linear rates (Vyazovkin & Dollimore 1996, J. Chem. Inf. Comput. Sci. 36:42, from memory): the E that minimises Σ_{i≠j} I_i β_j/(I_j β_i) with I(E, T) = ∫_0^T exp(−E/RT') dT' = (E/R) p(x), p by Senum & Yang.
 * Integrated from zero at each α, so E is a mean over 0 … α where it varies.
 * @param rate K/s   @param temperature K   @param work one a scan, reused
 */
export function fitVyazovkinLinear(
  rate: ArrayLike<number>,
  temperature: ArrayLike<number>,
  weights: ArrayLike<number>,
  start: number,
  work: ArrheniusIntegral[],
): VyazovkinEstimate {
  let inverse = 0;
  for (let i = 0; i < temperature.length; i++) inverse += 1 / temperature[i] / temperature.length;
  return fitVyazovkin(
    (energy, out) => {
      const c = energy / GAS_CONSTANT;
      for (let i = 0; i < temperature.length; i++) {
        const x = c / temperature[i];
        const e = Math.exp(c * inverse - x) / rate[i];
        const h = temperatureIntegralFactorFast(x) / x;
        out[i].value = temperature[i] * h * e;
        out[i].byEnergy = (-e * (1 - h)) / (x * GAS_CONSTANT);
        out[i].byEnergy2 = e / (GAS_CONSTANT * GAS_CONSTANT * c);
      }
    },
    weights,
    start,
    work,
  );
}
