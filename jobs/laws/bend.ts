import { GAS_CONSTANT } from '../../schema/wire/units.ts';

/**
 * The bent rate law: E_loc(x) = E0 exp(q u), u = (x − x0)/Δx, x = 1/T, so that E stays positive and
 * ln K(x) = ln K0 − (E0 Δx/R) (e^(q u) − 1)/q in closed form; q = 0 is Arrhenius, with x0 the reference inverse temperature.
 */
export interface BentScale {
  /** 1/K: middle and half span of the inverse temperatures */
  x0: number;
  dx: number;
}

export function bentScale(inverseTemperatures: ArrayLike<number>): BentScale {
  let low = Number.POSITIVE_INFINITY;
  let high = 0;
  for (let i = 0; i < inverseTemperatures.length; i++) {
    low = Math.min(low, inverseTemperatures[i]);
    high = Math.max(high, inverseTemperatures[i]);
  }
  return { x0: (low + high) / 2, dx: Math.max((high - low) / 2, 1e-9) };
}

/** (e^(q u) − 1)/q and its derivative by q, by series near q u = 0. */
export function bendTerm(q: number, u: number): { value: number; byQ: number } {
  const z = q * u;
  if (Math.abs(z) < 1e-3) {
    return { value: u * (1 + z / 2 + (z * z) / 6 + (z * z * z) / 24), byQ: u * u * (0.5 + z / 3 + (z * z) / 8) };
  }
  const e = Math.exp(z);
  return { value: (e - 1) / q, byQ: (z * e - e + 1) / (q * q) };
}

/** ln K(x) − ln K0. @param energyJPerMol E0 at x0 */
export function bentLogRate(x: number, energyJPerMol: number, q: number, scale: BentScale): number {
  return -((energyJPerMol * scale.dx) / GAS_CONSTANT) * bendTerm(q, (x - scale.x0) / scale.dx).value;
}

/** E_loc at x, J/mol. */
export function localEnergy(x: number, energyJPerMol: number, q: number, scale: BentScale): number {
  return energyJPerMol * Math.exp((q * (x - scale.x0)) / scale.dx);
}
