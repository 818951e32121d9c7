import type { ArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { findRoot } from '../../numeric/root.ts';

/** Fills the integral J_i(E) of each scan over one step of conversion (scale common to all scans). */
export type StepIntegrals = (energy: number, out: ArrheniusIntegral[]) => void;

export interface VyazovkinEstimate {
  energy: number;
  /** J/mol, where the integrals left in `work` were made: within `REACH` of `energy` */
  madeAt: number;
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
 * Integrals are carried this part of E along the first two derivatives of their logarithms instead of made anew: the third, that of a
 * whole curve from the start of its ramp, is then below 1e-8 and all but the same for all scans.
 */
const REACH = 3e-3;

/** Weighted mean of ln J at the estimated E, the scale of J as it was made. @param work as the estimate left it */
export function meanLnIntegral(
  { energy, madeAt }: VyazovkinEstimate,
  weights: ArrayLike<number>,
  work: readonly ArrheniusIntegral[],
): number {
  const moved = energy - madeAt;
  let sum = 0;
  let total = 0;
  for (let i = 0; i < work.length; i++) {
    const at = work[i];
    const r = at.byEnergy / at.value;
    const bend = at.byEnergy2 / at.value - r * r;
    sum += weights[i] * (Math.log(at.value) + moved * (r + (moved * bend) / 2));
    total += weights[i];
  }
  return sum / total;
}

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
  let madeAt = Number.NaN;
  /** dΦ/dE; d²Φ/dE² goes to `second`. */
  const slope = (energy: number): number => {
    if (!(Math.abs(energy - madeAt) < REACH * Math.abs(energy))) {
      integrals(energy, work);
      madeAt = energy;
      evaluations++;
    }
    const moved = energy - madeAt;
    let a = 0;
    let a1 = 0;
    let a2 = 0;
    let b = 0;
    let b1 = 0;
    let b2 = 0;
    for (let i = 0; i < work.length; i++) {
      const w = weights[i];
      const at = work[i];
      const r0 = at.byEnergy / at.value;
      const bend = at.byEnergy2 / at.value - r0 * r0;
      const r = r0 + moved * bend;
      const J = moved === 0 ? at.value : at.value * Math.exp(moved * (r0 + (moved * bend) / 2));
      const wJ = w * J;
      const perJ = w / J;
      a += wJ;
      a1 += wJ * r;
      a2 += wJ * (bend + r * r);
      b += perJ;
      b1 -= perJ * r;
      b2 += perJ * (r * r - bend);
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
    if (step < TOLERANCE * Math.max(LEAST_SCALE, Math.abs(energy)))
      return { energy, madeAt, converged: true, evaluations };
  }
  try {
    const reach = 3 * Math.max(LEAST_SCALE, Math.abs(start));
    const low = Math.max(lowest, start - (lowest > 0 ? reach / 4 : reach));
    energy = findRoot(slope, low, Math.min(highest, start + reach), 1e-6 * LEAST_SCALE);
    return { energy, madeAt, converged: true, evaluations };
  } catch {
    integrals(start, work);
    madeAt = start;
    return { energy: start, madeAt, converged: false, evaluations };
  }
}
