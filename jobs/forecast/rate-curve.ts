import type { MeltingData } from '../../schema/wire/forecasts.ts';
import type { SharedLaw, SharedLawDraws } from '../../schema/wire/shared-law.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { lnDrivingFactor, turnbullDrivingForce } from '../glass/driving-force.ts';
import { lnRateCurve, localEnergyOf, type RateLaw, relativeDriving } from '../glass/shared-law-values.ts';
import { localEnergy } from '../laws/bend.ts';
import { fitLine } from '../numeric/line.ts';

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
 * carried on below it is dangerously optimistic) and, where melting data exist, the driving force above the measured temperatures, unless
 * the law carries it already.
 */
export function sharedRateCurve(law: SharedLaw, p: LawParameters, melting?: MeltingData): RateCurve {
  const { x0PerK, dxPerK, driving } = law;
  const { lnRateAtMiddle, energyJPerMol, bend } = p;
  // Written out: made for every draw, and a spread costs more than all the rest.
  const own: RateLaw = { lnRateAtMiddle, energyJPerMol, bend, x0PerK, dxPerK, driving };
  const xf = 1 / law.frozenBelowK;
  const frozenEnergy = localEnergyOf(own, law.frozenBelowK);
  const lnRate = lnRateCurve(own);
  const frozenLnRate = lnRate(law.frozenBelowK);
  const scale = { x0: x0PerK, dx: dxPerK };
  return withDrive(
    {
      lnRate: (T) => (1 / T > xf ? frozenLnRate - (frozenEnergy / GAS_CONSTANT) * (1 / T - xf) : lnRate(T)),
      steepness: (T) =>
        1 / T > xf
          ? frozenEnergy
          : Math.max(localEnergy(1 / T, p.energyJPerMol, p.bend, scale), driving?.enthalpyJPerMol ?? 0),
      breaksK: [law.frozenBelowK],
      exponent: p.avramiExponent,
    },
    law,
    melting,
  );
}

/**
 * The straight Arrhenius law closest to the bent one over its measured span (least squares in ln K, even in 1/T): with f(u) = (e^(q u) − 1)/q
 * on −1 … 1 its slope is 3 (q cosh q − sinh q)/q³ and its mean (sinh q/q − 1)/q. The pessimistic end below the frozen point. A driving force
 * in the law counts with the slope and mean of its own least-squares line.
 */
export function straightRateCurve(law: SharedLaw, p: LawParameters, melting?: MeltingData): RateCurve {
  const q = p.bend;
  const small = Math.abs(q) < 0.02;
  const slope = small ? 1 + (q * q) / 10 + q ** 4 / 280 : (3 * (q * Math.cosh(q) - Math.sinh(q))) / q ** 3;
  const mean = small ? q / 6 + q ** 3 / 120 : (Math.sinh(q) / q - 1) / q;
  const drive = drivingLine(law);
  const energy = p.energyJPerMol * slope - drive.energyJPerMol;
  const lnRateAtMiddle = p.lnRateAtMiddle - ((p.energyJPerMol * law.dxPerK) / GAS_CONSTANT) * mean + drive.mean;
  return withDrive(
    {
      lnRate: (T) => lnRateAtMiddle - (energy / GAS_CONSTANT) * (1 / T - law.x0PerK),
      steepness: () => energy,
      breaksK: [],
      exponent: p.avramiExponent,
    },
    { ...law, driving: undefined },
    melting,
  );
}

const LINE_POINTS = 41;

/** Least-squares line of the law's ln D, even in 1/T over its measured span: mean, and R × slope in J/mol. */
function drivingLine(law: SharedLaw): { mean: number; energyJPerMol: number } {
  if (!law.driving) return { mean: 0, energyJPerMol: 0 };
  // The scale reaches to temperatures as measured; those of the material stay below melting.
  const [from, to] = [1 / law.highestMeasuredK, 1 / law.lowestMeasuredK];
  const x = Array.from({ length: LINE_POINTS }, (_, k) => from + ((to - from) * k) / (LINE_POINTS - 1) - law.x0PerK);
  const drive = relativeDriving(law);
  const line = fitLine(
    x,
    x.map((v) => drive(1 / (law.x0PerK + v))),
  );
  return { mean: line.intercept, energyJPerMol: GAS_CONSTANT * line.slope };
}

/** ln[1 − exp(−Δμ/RT)]; −∞ from the melting temperature up. Without an enthalpy the factor is 1 below melting. */
function lnDrivingForce({ meltingK, enthalpyJPerMol }: MeltingData, temperatureK: number): number {
  if (temperatureK >= meltingK) return Number.NEGATIVE_INFINITY;
  if (enthalpyJPerMol === undefined) return 0;
  return lnDrivingFactor(turnbullDrivingForce({ temperatureK: meltingK, enthalpyJPerMol }, temperatureK), temperatureK);
}

/**
 * A law without a factor of its own was fitted with the driving force in it: it then enters only above the measured temperatures, relative to
 * its value at the highest. Either way nothing crystallises from melting up.
 */
function withDrive(
  curve: RateCurve,
  { driving, highestMeasuredK }: Pick<SharedLaw, 'driving' | 'highestMeasuredK'>,
  melting?: MeltingData,
): RateCurve {
  if (driving) return { ...curve, breaksK: [...curve.breaksK, driving.temperatureK] };
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
