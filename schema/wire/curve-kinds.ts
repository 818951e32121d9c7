/** Kinds of curves that a sample may have, in the order in which they are shown. */
export const CURVE_KINDS = [
  'thermogram',
  'baseline',
  'conversion',
  'kissinger',
  'energy',
  'local_energy',
  'growth',
  'viscosity',
  'ttt',
  'constant_heating',
] as const;
export type CurveKind = (typeof CURVE_KINDS)[number];
