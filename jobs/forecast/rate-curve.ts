import type { MeltingData } from '../../schema/wire/forecasts.ts';
import type { SharedLaw, SharedLawDraws } from '../../schema/wire/shared-law.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { lnDrivingFactor, turnbullDrivingForce } from '../glass/driving-force.ts';
import { bentLogRate, localEnergy } from '../laws/bend.ts';

/** ln K(T), K in 1/s, with what an integration along a programme must know of it. */
export interface RateCurve {
  lnRate(temperatureK: number): number;
  /** J/mol: at least R |d ln K/d(1/T)| of every factor of K at this temperature, from which the length of a panel follows */
  steepness(temperatureK: number): number;
  /** Temperatures at which the law changes its form, K */
  breaksK: readonly number[];
  /** JMAK exponent */
  exponent: number;
}

/** The numbers of a shared law that differ between draws. */
export interface LawParameters {
  lnRateAtMiddle: number;
  energyJPerMol: number;
  bend: number;
  avramiExponent: number;
}

export const drawnParameters = (draws: SharedLawDraws, d: number): LawParameters => ({
  lnRateAtMiddle: draws.lnRateAtMiddle[d],
  energyJPerMol: draws.energyJPerMol[d],
  bend: draws.bend[d],
  avramiExponent: draws.avramiExponent[d],
});

/**
 * The shared law with E_loc held at its value at `frozenBelowK` for all lower temperatures (a glass is roughly Arrhenius; a bend
 * carried on below it is dangerously optimistic) and, where melting data exist, the driving force above the measured temperatures.
 */
export function sharedRateCurve(law: SharedLaw, p: LawParameters, melting?: MeltingData): RateCurve {
  const scale = { x0: law.x0PerK, dx: law.dxPerK };
  const { lnRateAtMiddle, energyJPerMol, bend } = p;
  const xf = 1 / law.frozenBelowK;
  const frozenEnergy = localEnergy(xf, energyJPerMol, bend, scale);
  const frozenLnRate = lnRateAtMiddle + bentLogRate(xf, energyJPerMol, bend, scale);
  return withDrive(
    {
      lnRate(T) {
        const x = 1 / T;
        return x > xf
          ? frozenLnRate - (frozenEnergy / GAS_CONSTANT) * (x - xf)
          : lnRateAtMiddle + bentLogRate(x, energyJPerMol, bend, scale);
      },
      steepness: (T) => (1 / T > xf ? frozenEnergy : localEnergy(1 / T, energyJPerMol, bend, scale)),
      breaksK: [law.frozenBelowK],
      exponent: p.avramiExponent,
    },
    law.highestMeasuredK,
    melting,
  );
}

/**
 * The straight Arrhenius law closest to the bent one over its measured span (least squares in ln K, even in 1/T): with f(u) = (e^(q u) − 1)/q
 * on −1 … 1 its slope is 3 (q cosh q − sinh q)/q³ and its mean (sinh q/q − 1)/q. The pessimistic end below the frozen point.
 */
export function straightRateCurve(law: SharedLaw, p: LawParameters, melting?: MeltingData): RateCurve {
  const q = p.bend;
  const small = Math.abs(q) < 0.02;
  const slope = small ? 1 + (q * q) / 10 + q ** 4 / 280 : (3 * (q * Math.cosh(q) - Math.sinh(q))) / q ** 3;
  const mean = small ? q / 6 + q ** 3 / 120 : (Math.sinh(q) / q - 1) / q;
  const energy = p.energyJPerMol * slope;
  const lnRateAtMiddle = p.lnRateAtMiddle - ((p.energyJPerMol * law.dxPerK) / GAS_CONSTANT) * mean;
  return withDrive(
    {
      lnRate: (T) => lnRateAtMiddle - (energy / GAS_CONSTANT) * (1 / T - law.x0PerK),
      steepness: () => energy,
      breaksK: [],
      exponent: p.avramiExponent,
    },
    law.highestMeasuredK,
    melting,
  );
}

/** ln[1 − exp(−Δμ/RT)]; −∞ from the melting temperature up. Without an enthalpy the factor is 1 below melting. */
function lnDrivingForce({ meltingK, enthalpyJPerMol }: MeltingData, temperatureK: number): number {
  if (temperatureK >= meltingK) return Number.NEGATIVE_INFINITY;
  if (enthalpyJPerMol === undefined) return 0;
  return lnDrivingFactor(turnbullDrivingForce({ temperatureK: meltingK, enthalpyJPerMol }, temperatureK), temperatureK);
}

/** The law was fitted with the driving force in it: it enters only above the measured temperatures, relative to its value at the highest. */
function withDrive(curve: RateCurve, highestMeasuredK: number, melting?: MeltingData): RateCurve {
  if (!melting) return curve;
  const fromK = Math.min(highestMeasuredK, melting.meltingK - 1);
  const reference = lnDrivingForce(melting, fromK);
  return {
    ...curve,
    lnRate: (T) => curve.lnRate(T) + (T > fromK ? lnDrivingForce(melting, T) - reference : 0),
    steepness: (T) => Math.max(curve.steepness(T), T > fromK ? (melting.enthalpyJPerMol ?? 0) : 0),
    breaksK: [...curve.breaksK, fromK, melting.meltingK],
  };
}

/** Derivatives of ln t (any conversion, constant temperature) by (ln K0, ln E0, q), central differences: the law is smooth in all three. */
export function lnTimeGradient(law: SharedLaw, temperatureK: number): [number, number, number] {
  const lnTime = (lnK: number, lnE: number, q: number) =>
    -sharedRateCurve(law, {
      lnRateAtMiddle: law.lnRateAtMiddle + lnK,
      energyJPerMol: law.energyJPerMol * Math.exp(lnE),
      bend: law.bend + q,
      avramiExponent: law.avramiExponent,
    }).lnRate(temperatureK);
  const h = 1e-4;
  return [
    (lnTime(h, 0, 0) - lnTime(-h, 0, 0)) / (2 * h),
    (lnTime(0, h, 0) - lnTime(0, -h, 0)) / (2 * h),
    (lnTime(0, 0, h) - lnTime(0, 0, -h)) / (2 * h),
  ];
}
