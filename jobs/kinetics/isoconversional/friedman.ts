import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { fitLine } from '../../numeric/line.ts';
import type { EnergyEstimate } from '../peak-methods.ts';

/**
 * Friedman 1964 (J. Polym. Sci. C 6:183): ln(dα/dt) = ln[A f(α)] − E/(R T) over the scans at one conversion.
 * @param lnRate ln(dα/dt), dα/dt in 1/s   @param temperature K
 */
export function fitFriedman(
  lnRate: ArrayLike<number>,
  temperature: ArrayLike<number>,
  weights?: ArrayLike<number>,
): EnergyEstimate {
  const x = new Float64Array(temperature.length);
  for (let i = 0; i < x.length; i++) x[i] = 1 / temperature[i];
  const line = fitLine(x, lnRate, weights);
  return {
    energy: -GAS_CONSTANT * line.slope,
    energyError: GAS_CONSTANT * line.slopeError,
    intercept: line.intercept,
    residuals: line.residuals,
  };
}
