import type { SharedLaw, SharedLawDraws } from '../../schema/wire/shared-law.ts';
import { fitLine } from '../numeric/line.ts';
import { lnDrivingFactor, type Melting, thompsonSpaepenDrivingForce, turnbullDrivingForce } from './driving-force.ts';
import { lnRateCurve, lnRateOf, type RateLaw } from './shared-law-values.ts';
import { log10Viscosity, type ViscosityFit, type ViscosityLaw } from './viscosity.ts';

/** Published trend ξ ≈ 1.1 − 0.005 m (Ediger, Harrowell & Yu 2008, J. Chem. Phys. 128:034709; the two coefficients from memory). */
export const trendDecoupling = (fragility: number): number => 1.1 - 0.005 * fragility;

export const DRIVING_FORCES = {
  turnbull: turnbullDrivingForce,
  thompson_spaepen: thompsonSpaepenDrivingForce,
  ignored: undefined,
} as const;
export type DrivingForceName = keyof typeof DRIVING_FORCES;

export interface Decoupling {
  exponent: number;
  drawn: Float64Array;
  /** K, temperatures of the supercooled liquid it was read between */
  lowK: number;
  highK: number;
}

const POINTS = 15;
/** Step of the differences: decades, K, units of m */
const STEP = 0.01;
/** Nearer to melting than this the driving force's own error rules. */
const BELOW_MELTING = 0.97;
/** The liquid must span this much of 1/T (as T difference ÷ T) for a slope. */
const LEAST_SPAN = 0.01;

/**
 * ξ of K ∝ η^−ξ [1 − exp(−Δμ/(R T))] as the slope of ln K − ln(driving factor) against −ln η over the measured temperatures of the
 * supercooled liquid, for the law and for each of its draws. Holds if nuclei pre-exist: with nucleation on heating K carries both.
 * @param melting a mole of the unit that attaches; without it the driving factor is 1
 * @returns undefined where the measured temperatures hardly reach into the liquid
 */
export function fitDecoupling(
  law: SharedLaw,
  draws: SharedLawDraws,
  viscosity: ViscosityLaw,
  melting: Melting | undefined,
  force: Exclude<DrivingForceName, 'ignored'> = 'turnbull',
): Decoupling | undefined {
  const lowK = Math.max(law.lowestMeasuredK, viscosity.glassTransitionK);
  const highK = Math.min(
    law.highestMeasuredK,
    melting ? BELOW_MELTING * melting.temperatureK : Number.POSITIVE_INFINITY,
  );
  if (!(highK - lowK > LEAST_SPAN * lowK)) return undefined;
  const T = Float64Array.from(
    { length: POINTS },
    (_, k) => 1 / (1 / lowK + ((1 / highK - 1 / lowK) * k) / (POINTS - 1)),
  );
  const mobility = T.map((t) => -Math.LN10 * log10Viscosity(viscosity, t));
  const driving = T.map((t) => (melting ? lnDrivingFactor(DRIVING_FORCES[force](melting, t), t) : 0));
  const slope = (l: RateLaw): number => {
    const lnRate = lnRateCurve(l);
    return fitLine(
      mobility,
      T.map((t, k) => lnRate(t) - driving[k]),
    ).slope;
  };
  const held = { x0PerK: law.x0PerK, dxPerK: law.dxPerK, driving: law.driving };
  return {
    exponent: slope(law),
    drawn: Float64Array.from(draws.bend, (bend, k) =>
      slope({ ...held, bend, lnRateAtMiddle: draws.lnRateAtMiddle[k], energyJPerMol: draws.energyJPerMol[k] }),
    ),
    lowK,
    highK,
  };
}

/**
 * Standard error of ξ from that of a fitted viscosity law: by central differences over its three parameters, whose errors go together (a table
 * pins η between its rows far better than m at Tg).
 */
export function decouplingError(
  law: SharedLaw,
  { law: viscosity, covariance }: Pick<ViscosityFit, 'law' | 'covariance'>,
  melting: Melting | undefined,
): number {
  if (!covariance) return 0;
  const none = new Float64Array(0);
  const draws = { lnRateAtMiddle: none, energyJPerMol: none, bend: none, avramiExponent: none };
  const at = (part: Partial<ViscosityLaw>) =>
    fitDecoupling(law, draws, { ...viscosity, ...part }, melting)?.exponent ?? Number.NaN;
  const { log10Infinity, glassTransitionK, fragility } = viscosity;
  const gradient = [
    (at({ log10Infinity: log10Infinity + STEP }) - at({ log10Infinity: log10Infinity - STEP })) / (2 * STEP),
    (at({ glassTransitionK: glassTransitionK + STEP }) - at({ glassTransitionK: glassTransitionK - STEP })) /
      (2 * STEP),
    (at({ fragility: fragility + STEP }) - at({ fragility: fragility - STEP })) / (2 * STEP),
  ];
  let variance = 0;
  for (let a = 0; a < 3; a++) for (let b = 0; b < 3; b++) variance += gradient[a] * covariance[a * 3 + b] * gradient[b];
  return Math.sqrt(Math.max(0, variance));
}

/** log10 of the growth rate (m/s) at T: K of the law scaled so that it meets one measured growth rate. Holds if nuclei pre-exist. */
export function log10GrowthRate(
  law: SharedLaw,
  anchor: { temperatureK: number; rateMPerS: number },
  T: number,
): number {
  return Math.log10(anchor.rateMPerS) + (lnRateOf(law, T) - lnRateOf(law, anchor.temperatureK)) / Math.LN10;
}
