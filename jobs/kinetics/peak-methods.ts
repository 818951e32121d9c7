import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { temperatureIntegralFactorFast } from '../laws/temperature-integral.ts';
import { fitLine } from '../numeric/line.ts';

/** E in J/mol with its standard error from the scatter about the line, and the line's intercept (ln of SI quantities). */
export interface EnergyEstimate {
  energy: number;
  energyError: number;
  intercept: number;
  residuals: Float64Array;
}

/**
 * E from a line of ln(β/T^power) against 1/T with slope −factor E/R. The forms differ in the approximation of the temperature integral
 * only, and serve for peaks and, at one conversion, for curves:
 * power 2, factor 1: Kissinger 1957 (Anal. Chem. 29:1702), Kissinger–Akahira–Sunose;   power 1, factor 1: Boswell 1980;
 * power 1.92, factor 1.0008: Starink 2003 (Thermochim. Acta 404:163).
 * @param rate K/s   @param temperature K   @param weights ∝ 1/variance
 */
export function fitEnergyLine(
  rate: ArrayLike<number>,
  temperature: ArrayLike<number>,
  power: number,
  factor: number,
  weights?: ArrayLike<number>,
): EnergyEstimate {
  const n = rate.length;
  const x = new Float64Array(n);
  const y = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    x[i] = 1 / temperature[i];
    y[i] = Math.log(rate[i]) - power * Math.log(temperature[i]);
  }
  const line = fitLine(x, y, weights);
  const perSlope = -GAS_CONSTANT / factor;
  return {
    energy: perSlope * line.slope,
    energyError: Math.abs(perSlope) * line.slopeError,
    intercept: line.intercept,
    residuals: line.residuals,
  };
}

export const KISSINGER = { power: 2, factor: 1 } as const;
export const BOSWELL = { power: 1, factor: 1 } as const;
export const STARINK = { power: 1.92, factor: 1.0008 } as const;

/** ln A (A in 1/s) from Kissinger's intercept ln(A R/E). */
export const kissingerLnPrefactor = (k: Pick<EnergyEstimate, 'energy' | 'intercept'>): number =>
  k.intercept + Math.log(k.energy / GAS_CONSTANT);

/** Doyle's slope of −ln p(x) as the start, then −d ln p/dx = 1/h(x) at the mean temperature, repeated (Flynn 1983, J. Thermal Anal. 27:95). */
const DOYLE_SLOPE = 1.0516;
const FLYNN_ROUNDS = 8;

/** Ozawa 1965 / Flynn & Wall 1966: ln β against 1/T, with the factor corrected by iteration. */
export function fitOzawaFlynnWall(
  rate: ArrayLike<number>,
  temperature: ArrayLike<number>,
  weights?: ArrayLike<number>,
): EnergyEstimate {
  const line = fitEnergyLine(rate, temperature, 0, 1, weights);
  let inverse = 0;
  let sw = 0;
  for (let i = 0; i < temperature.length; i++) {
    const w = weights ? weights[i] : 1;
    sw += w;
    inverse += w / temperature[i];
  }
  const factor = flynnFactor(line.energy, inverse / sw);
  return { ...line, energy: line.energy / factor, energyError: line.energyError / factor };
}

/** @param energy −R × slope of ln β against 1/T, J/mol   @param inverse weighted mean of 1/T */
export function flynnFactor(energy: number, inverse: number): number {
  let factor = DOYLE_SLOPE;
  for (let round = 0; round < FLYNN_ROUNDS; round++) {
    const x = (energy / factor / GAS_CONSTANT) * inverse;
    if (!(x > 1)) break;
    factor = 1 / temperatureIntegralFactorFast(x);
  }
  return factor;
}

/**
 * Weighted least-squares slopes against 1/T of ln β, ln T and ln(dα/dt), K: every line method is a mix of them, so one pass serves all
 * (Monte Carlo draws need the energies only).
 */
export interface InverseSlopes {
  lnRate: number;
  lnTemperature: number;
  lnReaction: number;
  /** weighted means */
  inverse: number;
  meanLnRate: number;
  meanLnTemperature: number;
}

/** @param lnReaction ln(dα/dt), or nothing for peaks */
export function inverseSlopes(
  lnRate: Float64Array,
  temperature: Float64Array,
  weights: Float64Array,
  lnReaction?: Float64Array,
): InverseSlopes {
  const n = temperature.length;
  let sw = 0;
  let sx = 0;
  let sb = 0;
  for (let i = 0; i < n; i++) {
    sw += weights[i];
    sx += weights[i] / temperature[i];
    sb += weights[i] * lnRate[i];
  }
  const inverse = sx / sw;
  let xx = 0;
  let xb = 0;
  let xT = 0;
  let xr = 0;
  let sT = 0;
  for (let i = 0; i < n; i++) {
    const dx = 1 / temperature[i] - inverse;
    const lnT = Math.log(temperature[i]);
    const w = weights[i] * dx;
    xx += w * dx;
    xb += w * lnRate[i];
    xT += w * lnT;
    sT += weights[i] * lnT;
    if (lnReaction) xr += w * lnReaction[i];
  }
  return {
    lnRate: xb / xx,
    lnTemperature: xT / xx,
    lnReaction: xr / xx,
    inverse,
    meanLnRate: sb / sw,
    meanLnTemperature: sT / sw,
  };
}

/** E of `fitEnergyLine` from the slopes, J/mol. */
export const energyFromSlopes = (s: InverseSlopes, power: number, factor: number): number =>
  (-GAS_CONSTANT / factor) * (s.lnRate - power * s.lnTemperature);

/** A ramp that starts above this part of the peak temperature spoils Augis & Bennett's energy (trial: −17 % at 0.92). */
export const LATEST_START = 0.75;

/** Augis & Bennett 1978 (J. Thermal Anal. 13:283): ln(β/(Tp − T0)) against 1/Tp, T0 the start of the ramp. */
export function fitAugisBennett(
  rate: ArrayLike<number>,
  peakK: ArrayLike<number>,
  rampStartK: ArrayLike<number>,
  weights?: ArrayLike<number>,
): EnergyEstimate {
  const n = rate.length;
  const x = new Float64Array(n);
  const y = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    x[i] = 1 / peakK[i];
    y[i] = Math.log(rate[i] / (peakK[i] - rampStartK[i]));
  }
  const line = fitLine(x, y, weights);
  return {
    energy: -GAS_CONSTANT * line.slope,
    energyError: GAS_CONSTANT * line.slopeError,
    intercept: line.intercept,
    residuals: line.residuals,
  };
}

/** Augis–Bennett exponent n = 2.5 R Tp²/(E ΔT_FWHM), mean over scans. 2.5 as published; exact 2.446, so it reads a few per cent high. */
export function augisBennettExponent(
  peakK: ArrayLike<number>,
  widthK: ArrayLike<number>,
  energy: number,
  weights: ArrayLike<number>,
): number {
  let sum = 0;
  let sw = 0;
  for (let i = 0; i < peakK.length; i++) {
    sum += (weights[i] * 2.5 * GAS_CONSTANT * peakK[i] ** 2) / (energy * widthK[i]);
    sw += weights[i];
  }
  return sum / sw;
}
