import type { ArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { findRoot } from '../../numeric/root.ts';

/** Fills the integral J_i(E) of each scan over one step of conversion (scale common to all scans). */
export type StepIntegrals = (energy: number, out: ArrheniusIntegral[]) => void;

export interface VyazovkinEstimate {
  energy: number;
  converged: boolean;
  evaluations: number;
}

/** Bracket of the search, J/mol. */
export interface EnergyBracket {
  lowest: number;
  highest: number;
}
const HEATING_BRACKET: EnergyBracket = { lowest: 1e3, highest: 2e6 };
/** Effective energies on cooling fall below zero near the melting point. */
export const COOLING_BRACKET: EnergyBracket = { lowest: -1e6, highest: 1e6 };
/** The Newton step, relative to E or 1 kJ/mol, after which the next would be below 1e-8 (convergence is quadratic). */
const TOLERANCE = 1e-5;
const LEAST_SCALE = 1e3;

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
  { lowest, highest }: EnergyBracket = HEATING_BRACKET,
): VyazovkinEstimate {
  let evaluations = 0;
  let second = 0;
  /** dΦ/dE; d²Φ/dE² goes to `second`. */
  const slope = (energy: number): number => {
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
    second = a2 * b + 2 * a1 * b1 + a * b2;
    return a1 * b + a * b1;
  };
  let energy = Math.min(highest, Math.max(lowest, start));
  for (let i = 0; i < 12; i++) {
    const first = slope(energy);
    if (!(second > 0) || !Number.isFinite(first)) break;
    const next = energy - first / second;
    if (!(next > lowest && next < highest)) break;
    const step = Math.abs(next - energy);
    energy = next;
    if (step < TOLERANCE * Math.max(LEAST_SCALE, Math.abs(energy))) return { energy, converged: true, evaluations };
  }
  try {
    const reach = 3 * Math.max(LEAST_SCALE, Math.abs(start));
    const low = Math.max(lowest, start - (lowest > 0 ? reach / 4 : reach));
    energy = findRoot(slope, low, Math.min(highest, start + reach), 1e-6 * LEAST_SCALE);
    return { energy, converged: true, evaluations };
  } catch {
    return { energy: start, converged: false, evaluations };
  }
}
