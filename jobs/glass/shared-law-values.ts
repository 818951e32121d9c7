import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { bentLogRate, localEnergy } from '../laws/bend.ts';
import { drivingEnergy, lnDrivingFactor, turnbullDrivingForce } from './driving-force.ts';

/** The part of a shared law that gives K(T). */
export type RateLaw = Pick<SharedLaw, 'lnRateAtMiddle' | 'energyJPerMol' | 'bend' | 'x0PerK' | 'dxPerK' | 'driving'>;

/** ln of the law's driving factor at T relative to that at 1/x0; 0 where it carries none, −∞ from melting up. */
export function relativeDriving({ driving, x0PerK }: Pick<RateLaw, 'driving' | 'x0PerK'>): (T: number) => number {
  if (!driving) return () => 0;
  const at = (T: number) => lnDrivingFactor(turnbullDrivingForce(driving, T), T);
  const reference = at(1 / x0PerK);
  return (T) => at(T) - reference;
}

/** ln K of the shared law against T, K in 1/s; made once for a law that is asked often. */
export function lnRateCurve(law: RateLaw): (T: number) => number {
  const scale = { x0: law.x0PerK, dx: law.dxPerK };
  const drive = relativeDriving(law);
  return (T) => law.lnRateAtMiddle + bentLogRate(1 / T, law.energyJPerMol, law.bend, scale) + drive(T);
}

export const lnRateOf = (law: RateLaw, T: number): number => lnRateCurve(law)(T);

/** E_loc = −R d ln K/d(1/T) of the shared law at T, J/mol, driving force included. */
export function localEnergyOf(law: RateLaw, T: number): number {
  const own = localEnergy(1 / T, law.energyJPerMol, law.bend, { x0: law.x0PerK, dx: law.dxPerK });
  return law.driving ? own - drivingEnergy(law.driving, T) : own;
}
