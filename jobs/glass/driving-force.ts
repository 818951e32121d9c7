import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import type { GlassFacts } from '../../schema/wire/verdicts.ts';

/** What is known of melting, a mole of the unit that attaches to the crystal. */
export interface Melting {
  temperatureK: number;
  enthalpyJPerMol: number;
}

/** A mole of the unit that attaches: the sheet's molar mass says which (alloys: mean molar mass per atom). */
export function meltingOf({ meltingK, meltingEnthalpyJPerKg, molarMassKgPerMol }: GlassFacts): Melting | undefined {
  if (meltingK === undefined || meltingEnthalpyJPerKg === undefined || molarMassKgPerMol === undefined)
    return undefined;
  return { temperatureK: meltingK, enthalpyJPerMol: meltingEnthalpyJPerKg * molarMassKgPerMol };
}

/** Free energy of crystallisation Δμ(T) > 0 below melting, J/mol, with ΔS constant (Turnbull 1950, J. Appl. Phys. 21:1022). */
export const turnbullDrivingForce = ({ temperatureK: Tm, enthalpyJPerMol: H }: Melting, T: number): number =>
  (H * (Tm - T)) / Tm;

/** The same with a constant difference of heat capacities, Δμ = ΔH (Tm − T)/Tm · 2T/(Tm + T) (Thompson & Spaepen 1979, Acta Metall. 27:1855). */
export const thompsonSpaepenDrivingForce = (melting: Melting, T: number): number =>
  (turnbullDrivingForce(melting, T) * 2 * T) / (melting.temperatureK + T);

/** ln[1 − exp(−Δμ/(R T))]; −∞ at and above melting. */
export function lnDrivingFactor(drivingForceJPerMol: number, temperatureK: number): number {
  const x = drivingForceJPerMol / (GAS_CONSTANT * temperatureK);
  return x > 0 ? Math.log(-Math.expm1(-x)) : Number.NEGATIVE_INFINITY;
}

/** R d ln[1 − exp(−Δμ/(R T))]/d(1/T) with Turnbull's Δμ: what the driving force takes off the local energy, J/mol. */
export const drivingEnergy = (melting: Melting, T: number): number =>
  melting.enthalpyJPerMol / Math.expm1(turnbullDrivingForce(melting, T) / (GAS_CONSTANT * T));
