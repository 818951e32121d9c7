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
  const lowest = minimise(variance, energy * 0.97, energy * 1.03);
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

/** S² is flat at its minimum: this much of E changes it by less than a millionth. */
const SETTLED = 1e-6;

/** Golden section. */
function minimise(f: (x: number) => number, low: number, high: number): number {
  const g = (Math.sqrt(5) - 1) / 2;
  let [a, b] = [low, high];
  let c = b - g * (b - a);
  let d = a + g * (b - a);
  let fc = f(c);
  let fd = f(d);
  while (b - a > SETTLED * high) {
    if (fc < fd) {
      [b, d, fd] = [d, c, fc];
      c = b - g * (b - a);
      fc = f(c);
    } else {
      [a, c, fc] = [c, d, fd];
      d = a + g * (b - a);
      fd = f(d);
    }
  }
  return (a + b) / 2;
}
