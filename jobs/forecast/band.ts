import { studentQuantile } from '../numeric/distributions.ts';

/** On the scale on which the scatter is even: ln t, ln X, or K. */
export interface Band {
  value: number;
  lower?: number;
  upper?: number;
}

/** Fewest draws that make a band, and the share of them that must give a finite answer. */
export const LEAST_DRAWS = 20;
export const LEAST_SHARE = 0.9;

/** The quantile of the last degrees of freedom: a diagram asks hundreds of bands of one source, and it costs more than the rest of a band. */
let [lastDegrees, lastQuantile] = [Number.NaN, Number.NaN];

export function halfQuantile(degreesOfFreedom: number): number {
  if (degreesOfFreedom !== lastDegrees) {
    lastQuantile = studentQuantile(0.975, Math.max(1, degreesOfFreedom));
    lastDegrees = degreesOfFreedom;
  }
  return lastQuantile;
}

/**
 * Estimate ± t(0.975, n − p) × spread of the draws. No ends where too few draws answer: a band is never made of the draws that happened to.
 */
export function bandOf(value: number, drawn: ArrayLike<number>, degreesOfFreedom: number): Band {
  let [count, sum] = [0, 0];
  for (let d = 0; d < drawn.length; d++) {
    if (!Number.isFinite(drawn[d])) continue;
    count++;
    sum += drawn[d];
  }
  if (!Number.isFinite(value) || count < LEAST_DRAWS || count < LEAST_SHARE * drawn.length) return { value };
  const mean = sum / count;
  let squares = 0;
  for (let d = 0; d < drawn.length; d++) if (Number.isFinite(drawn[d])) squares += (drawn[d] - mean) ** 2;
  const half = halfQuantile(degreesOfFreedom) * Math.sqrt(squares / (count - 1));
  return { value, lower: value - half, upper: value + half };
}

/** Exponents beyond this are beyond every time in question; the number printed stays finite. */
const MOST_LN = 690;
export const expFinite = (ln: number): number => Math.exp(Math.max(-MOST_LN, Math.min(MOST_LN, ln)));
