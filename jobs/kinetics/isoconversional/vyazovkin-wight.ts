import type { ArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { fisherQuantile } from '../../numeric/distributions.ts';
import { findRoot } from '../../numeric/root.ts';
import type { StepIntegrals } from './vyazovkin.ts';

/** How far from E the limits are looked for, as parts of E, and how many halvings. */
const REACH = [0.01, 0.05, 0.2, 0.8];

/**
 * 95 % limits of Vyazovkin & Wight 2000 (Anal. Chem. 72:3171): E where S²(E)/S²_min = F(0.95; n−1, n−1),
 * S² = Σ_i Σ_{j≠i} (J_i/J_j − 1)²/(n(n−1)). Reported because asked for; trial, it covers 86 % at n = 3 and over 99 % from n = 10.
 * @param energy J/mol, where Φ has its minimum   @returns undefined where the curve does not rise that far
 */
export function vyazovkinWightLimits(
  integrals: StepIntegrals,
  energy: number,
  work: ArrheniusIntegral[],
): [number, number] | undefined {
  const n = work.length;
  // J_i/J_j − 1 = (u_i − u_j)/(1 + u_j) with u = J/mean − 1: one pass, and nothing cancels.
  const variance = (E: number): number => {
    integrals(E, work);
    let mean = 0;
    for (let i = 0; i < n; i++) mean += work[i].value / n;
    let su = 0;
    let suu = 0;
    for (let i = 0; i < n; i++) {
      const u = work[i].value / mean - 1;
      su += u;
      suu += u * u;
    }
    let sum = 0;
    for (let j = 0; j < n; j++) {
      const u = work[j].value / mean - 1;
      sum += (suu - 2 * u * su + n * u * u) / (1 + u) ** 2;
    }
    return sum / (n * (n - 1));
  };
  const lowest = minimise(variance, energy);
  const least = variance(lowest);
  if (!(least > 1e-20)) return [energy, energy];
  const limit = least * fisherQuantile(0.95, n - 1, n - 1);
  const side = (sign: 1 | -1): number | undefined => {
    let near = lowest;
    for (const part of REACH) {
      const far = lowest + sign * part * energy;
      if (variance(far) > limit) return findRoot((E) => variance(E) - limit, near, far, 1e-6 * energy);
      near = far;
    }
    return undefined;
  };
  const low = side(-1);
  const high = side(1);
  return low === undefined || high === undefined ? undefined : [low, high];
}

/** How far from E the minimum of S² may lie, and how far the two parabolas reach that find it, as parts of E. */
const MINIMUM_REACH = 0.03;
const PARABOLAS = [0.01, 3e-4];

/** By the vertex of a parabola through three values, then through three near by: S² is all but one. */
function minimise(f: (E: number) => number, energy: number): number {
  let at = energy;
  for (const part of PARABOLAS) {
    const h = part * energy;
    const below = f(at - h);
    const above = f(at + h);
    const bend = below + above - 2 * f(at);
    const step = bend > 0 ? (h * (below - above)) / (2 * bend) : below < above ? -h : h;
    at = Math.min(energy * (1 + MINIMUM_REACH), Math.max(energy * (1 - MINIMUM_REACH), at + step));
  }
  return at;
}
