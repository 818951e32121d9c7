/** A pure substance for calibration. */
export interface ReferenceSubstance {
  /** K, melting at equilibrium */
  meltingK: number;
  enthalpyJPerKg: number;
  /** J/(kg K) of the solid near its melting point; rounded, from memory: only parts a tail into contact and response */
  heatCapacityJPerKgK: number;
  names: readonly string[];
}

/**
 * Melting points: ITS-90 fixed points (Preston-Thomas 1990, Metrologia 27:3) for Ga, In, Sn, Zn, Al; Bi and Pb: CRC Handbook as stored in
 * the open library `chemicals`. Enthalpies: In: Archer & Rudtsch 2003, J. Chem. Eng. Data 48:1157 (28.6624 ± 0.0076 J/g); Sn: 60.4 J/g,
 * recommended by GEFTA, from memory; the others CRC as above (molar values ÷ molar mass).
 */
export const REFERENCE_SUBSTANCES: readonly ReferenceSubstance[] = [
  { names: ['ga', 'gallium'], meltingK: 302.9146, enthalpyJPerKg: 80_103, heatCapacityJPerKgK: 370 },
  { names: ['in', 'indium'], meltingK: 429.7485, enthalpyJPerKg: 28_662.4, heatCapacityJPerKgK: 240 },
  { names: ['sn', 'tin'], meltingK: 505.078, enthalpyJPerKg: 60_400, heatCapacityJPerKgK: 250 },
  { names: ['bi', 'bismuth'], meltingK: 544.556, enthalpyJPerKg: 53_144, heatCapacityJPerKgK: 130 },
  { names: ['pb', 'lead'], meltingK: 600.612, enthalpyJPerKg: 23_041, heatCapacityJPerKgK: 140 },
  { names: ['zn', 'zinc'], meltingK: 692.677, enthalpyJPerKg: 108_106, heatCapacityJPerKgK: 450 },
  { names: ['al', 'aluminium', 'aluminum'], meltingK: 933.473, enthalpyJPerKg: 396_938, heatCapacityJPerKgK: 1180 },
];

/** The substance whose symbol or name is a word of the sample's name (`In`, `indium 5 mg`), or undefined. */
export function findReferenceSubstance(sample: string): ReferenceSubstance | undefined {
  const words = sample.toLowerCase().split(/[^a-z]+/);
  return REFERENCE_SUBSTANCES.find(({ names }) => names.some((name) => words.includes(name)));
}
