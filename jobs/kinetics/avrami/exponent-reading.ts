/**
 * Avrami exponents by type of nucleation and growth, n = a + p b: a the nucleation index (0 none, 1 constant rate), b the dimension of
 * growth, p = 1 controlled by the interface, ½ by diffusion (Christian 1975, The Theory of Transformations in Metals and Alloys, 2nd ed.,
 * table IX; from memory).
 */
const READINGS: readonly [exponent: number, reading: string][] = [
  [0.5, 'thickening of plates by diffusion after their edges met'],
  [1, 'growth in one dimension from nuclei already there, or grain-boundary nucleation after saturation'],
  [1.5, 'growth by diffusion in three dimensions from nuclei already there'],
  [2, 'growth in two dimensions from nuclei already there, or in one at a constant nucleation rate'],
  [2.5, 'growth by diffusion in three dimensions at a constant nucleation rate'],
  [3, 'growth in three dimensions from nuclei already there, or in two at a constant nucleation rate'],
  [4, 'growth in three dimensions at a constant nucleation rate'],
];
/** A value this near to an integer or half-integer of the table is read as that, when the interval is narrower. */
const NEAR = 0.25;

/** In plain words what an exponent may mean. @param lower, upper 95 % interval, where known */
export function readExponent(n: number, lower = n, upper = n): string {
  const low = Math.min(lower, n - NEAR);
  const high = Math.max(upper, n + NEAR);
  const fits = READINGS.filter(([value]) => value >= low && value <= high).map(([v, text]) => `${v}: ${text}`);
  if (n > 4 + NEAR && fits.length === 0) fits.push('above 4: a nucleation rate that rises in time');
  if (n < 0.5 - NEAR) fits.push('below 0.5: no simple nucleation and growth');
  if (fits.length === 0) fits.push('between the simple types: a nucleation rate that falls in time, or a mixture');
  return `${fits.join('; or ')}. Other mechanisms give the same n (surface crystallisation lowers it); the curve alone cannot tell them apart.`;
}
