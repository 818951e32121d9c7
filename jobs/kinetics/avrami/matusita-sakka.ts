import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { CONVERSION_COUNT, type EventColumns } from '../event-data.ts';
import { LN_LN } from './ozawa.ts';

/** Slope −1.052 m E/R of ln[−ln(1−α)] against 1/T (Doyle's approximation, as published). */
const DOYLE = 1.052;

export interface MatusitaSakkaEstimate {
  exponent: number;
  /** m E_U, J/mol */
  scaledEnergy: number;
}

/**
 * Matusita & Sakka 1980 (J. Non-Cryst. Solids 38–39:741): ln[−ln(1−α)] = const − n ln β − 1.052 m E_U/(R T), fitted over all curve scans and
 * conversions at once. E_U follows with m = n (nuclei there before) or m = n − 1 (nuclei form on heating).
 * @param lnRate ln β of each curve scan   @param weights of the curve scans
 */
export function fitMatusitaSakka(
  d: EventColumns,
  curves: ArrayLike<number>,
  lnRate: ArrayLike<number>,
  weights: ArrayLike<number>,
): MatusitaSakkaEstimate {
  const m = curves.length;
  let sw = 0;
  let mx = 0;
  let mz = 0;
  let my = 0;
  for (let j = 0; j < m; j++) {
    const at = curves[j] * CONVERSION_COUNT;
    const w = weights[j];
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      sw += w;
      mx += w * lnRate[j];
      mz += w / d.temperatureK[at + k];
      my += w * LN_LN[k];
    }
  }
  mx /= sw;
  mz /= sw;
  my /= sw;
  let xx = 0;
  let xz = 0;
  let zz = 0;
  let xy = 0;
  let zy = 0;
  for (let j = 0; j < m; j++) {
    const at = curves[j] * CONVERSION_COUNT;
    const w = weights[j];
    const x = lnRate[j] - mx;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const z = 1 / d.temperatureK[at + k] - mz;
      const y = LN_LN[k] - my;
      xx += w * x * x;
      xz += w * x * z;
      zz += w * z * z;
      xy += w * x * y;
      zy += w * z * y;
    }
  }
  const determinant = xx * zz - xz * xz;
  return {
    exponent: -(xy * zz - zy * xz) / determinant,
    scaledEnergy: ((zy * xx - xy * xz) / determinant) * (-GAS_CONSTANT / DOYLE),
  };
}
