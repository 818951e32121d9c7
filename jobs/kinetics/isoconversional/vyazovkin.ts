import type { ArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { findRoot } from '../../numeric/root.ts';

/** Fills the integral J_i(E) of each scan over one step of conversion (scale common to all scans). */
export type StepIntegrals = (energy: number, out: ArrheniusIntegral[]) => void;

export interface VyazovkinEstimate {
  energy: number;
  converged: boolean;
  evaluations: number;
}

/** Bracket of the search, J/mol, and the step at which it has converged, relative. */
const LOWEST = 1e3;
const HIGHEST = 2e6;
const TOLERANCE = 1e-10;

/**
 * Vyazovkin 2001 (J. Comput. Chem. 22:178): the E that minimises Φ = Σ_{i≠j} J_i/J_j = (Σ J)(Σ 1/J) − n, here with weights on scans of
 * unequal scatter, Φ = (Σ w J)(Σ w/J). Newton on dΦ/dE with analytic derivatives from a start (Kissinger–Akahira–Sunose), Brent on
 * its sign where Newton leaves the bracket or finds no minimum.
 * @param work one integral a scan, reused
 */
export function fitVyazovkin(
  integrals: StepIntegrals,
  weights: ArrayLike<number>,
  start: number,
  work: ArrheniusIntegral[],
): VyazovkinEstimate {
  let evaluations = 0;
  const slopes = (energy: number): { first: number; second: number } => {
    evaluations++;
    integrals(energy, work);
    let a = 0;
    let a1 = 0;
    let a2 = 0;
    let b = 0;
    let b1 = 0;
    let b2 = 0;
    for (let i = 0; i < work.length; i++) {
      const w = weights[i];
      const { value: J, byEnergy: J1, byEnergy2: J2 } = work[i];
      const r = J1 / J;
      a += w * J;
      a1 += w * J1;
      a2 += w * J2;
      b += w / J;
      b1 -= (w * r) / J;
      b2 += (w * (2 * r * r - J2 / J)) / J;
    }
    return { first: a1 * b + a * b1, second: a2 * b + 2 * a1 * b1 + a * b2 };
  };
  let energy = Math.min(HIGHEST, Math.max(LOWEST, start));
  for (let i = 0; i < 12; i++) {
    const { first, second } = slopes(energy);
    if (!(second > 0) || !Number.isFinite(first)) break;
    const next = energy - first / second;
    if (!(next > LOWEST && next < HIGHEST)) break;
    const step = Math.abs(next - energy);
    energy = next;
    if (step < TOLERANCE * energy) return { energy, converged: true, evaluations };
  }
  try {
    energy = findRoot((e) => slopes(e).first, Math.max(LOWEST, start / 4), Math.min(HIGHEST, start * 4), 1e-6 * start);
    return { energy, converged: true, evaluations };
  } catch {
    return { energy: start, converged: false, evaluations };
  }
}
