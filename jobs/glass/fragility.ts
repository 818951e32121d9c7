import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { bendTerm, bentScale } from '../laws/bend.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { LeastSquares } from '../numeric/least-squares.ts';
import { fitLine } from '../numeric/line.ts';
import { LOG10_AT_GLASS_TRANSITION, LOG10_INFINITY } from './viscosity.ts';

/** The rate at which Tg and m are stated, K/s: 10 K/min, common practice. */
export const STATED_RATE_K_PER_S = 10 / 60;
/**
 * One line reads m too low (a true 90 as 77 over 0.1 – 10⁴ K/s; by 2 to 5 over 0.05 – 5 K/s). Over more than two decades the
 * bend is fitted; between one and two, which cannot carry it, it is that of the MYEGA law with the same Tg and m.
 */
const BENT_FROM_DECADES = 2;
const CURVED_FROM_DECADES = 1;
const LEAST_RATES = 3;

export interface MoynihanFit {
  /** at the stated rate: Tg, E_g and m with 95 % intervals (Student) */
  glassTransitionK: number;
  energyJPerMol: number;
  energy95: readonly [number, number];
  fragility: number;
  fragility95: readonly [number, number];
  /** `fitted` bend, the one `implied` by MYEGA, or one `line` */
  shape: 'line' | 'implied' | 'fitted';
  degrees: number;
  residualK: Float64Array;
}

/**
 * d ln β/d(1/Tg) = −E_g/R (Moynihan, Easteal, Wilder & Tucker 1974, J. Phys. Chem. 78:2673), m = E_g/(ln 10 R Tg), for scans that were each
 * cooled through the glass transition at their own heating rate. Over more than two decades by the bent law, E_g at the Tg of 10 K/min.
 * @returns undefined below three distinct rates
 */
export function fitMoynihan(rate: readonly number[], glassTransitionK: readonly number[]): MoynihanFit | undefined {
  const n = rate.length;
  const lnRate = rate.map(Math.log);
  const distinct = new Set(lnRate.map((v) => v.toFixed(2))).size;
  if (distinct < LEAST_RATES) return undefined;
  const decades = (Math.max(...lnRate) - Math.min(...lnRate)) / Math.LN10;
  const scale = bentScale(glassTransitionK.map((T) => 1 / T));
  const u = glassTransitionK.map((T) => (1 / T - scale.x0) / scale.dx);
  const line = fitLine(u, lnRate);
  if (!(line.slope < 0)) return undefined;
  const bent = decades > BENT_FROM_DECADES + 0.05 && distinct >= LEAST_RATES + 1 && n > 3;
  const p = bent ? 3 : 2;
  let held = 0;
  const solver = new LeastSquares(n, p, (x, r, J) => {
    const steep = Math.exp(x[1]);
    for (let i = 0; i < n; i++) {
      const t = bendTerm(bent ? x[2] : held, u[i]);
      r[i] = x[0] - steep * t.value - lnRate[i];
      J[i * p] = 1;
      J[i * p + 1] = -steep * t.value;
      if (bent) J[i * p + 2] = -steep * t.byQ;
    }
  });
  const start = [line.intercept, Math.log(-line.slope), ...(bent ? [0] : [])];
  let fit = solver.solve(Float64Array.from(start), new Float64Array(p).fill(0.1), 100);
  for (let round = 0; !bent && decades > CURVED_FROM_DECADES && round < 4; round++) {
    const E = (GAS_CONSTANT * Math.exp(fit.parameters[1])) / scale.dx;
    held = myegaBend(1 / scale.x0, (E * scale.x0) / (Math.LN10 * GAS_CONSTANT)) * scale.dx;
    fit = solver.solve(fit.parameters, new Float64Array(p).fill(0.1), 100);
  }
  const [c, lnSteep] = fit.parameters;
  const q = bent ? fit.parameters[2] : held;
  // Where ln β of the law is that of 10 K/min: c − A (e^(q u) − 1)/q.
  const level = (c - Math.log(STATED_RATE_K_PER_S)) / Math.exp(lnSteep);
  const at = Math.abs(q) < 1e-6 ? level : Math.log(Math.max(1e-6, 1 + q * level)) / q;
  const T = 1 / (scale.x0 + scale.dx * at);
  const energy = (GAS_CONSTANT * Math.exp(lnSteep + q * at)) / scale.dx;
  const degrees = n - p;
  // ln E_g = ln A + q u(Tg): its error with u(Tg) as it stands.
  const cov = fit.covariance;
  const variance = cov ? cov[p + 1] + (bent ? at * at * cov[8] + 2 * at * cov[5] : 0) : Number.NaN;
  const half =
    degrees > 0 ? studentQuantile(0.975, degrees) * Math.sqrt(Math.max(0, variance)) : Number.POSITIVE_INFINITY;
  const energy95 = [energy * Math.exp(-half), energy * Math.exp(half)] as const;
  const perFragility = Math.LN10 * GAS_CONSTANT * T;
  return {
    glassTransitionK: T,
    energyJPerMol: energy,
    energy95,
    fragility: energy / perFragility,
    fragility95: [energy95[0] / perFragility, energy95[1] / perFragility],
    shape: bent ? 'fitted' : held === 0 ? 'line' : 'implied',
    degrees,
    residualK: Float64Array.from(glassTransitionK, (Tg, i) => {
      const y = (c - lnRate[i]) / Math.exp(lnSteep);
      const v = Math.abs(q) < 1e-6 ? y : Math.log(Math.max(1e-6, 1 + q * y)) / q;
      return Tg - 1 / (scale.x0 + scale.dx * v);
    }),
  };
}

/** d ln E_loc/d(1/T) of the MYEGA law at Tg, K: with c = m/(12 − log10 η∞) − 1, E_loc ∝ exp(c (Tg/T − 1)) (1 + c Tg/T). */
function myegaBend(glassTransitionK: number, fragility: number): number {
  const c = Math.max(0, fragility / (LOG10_AT_GLASS_TRANSITION - LOG10_INFINITY) - 1);
  return (c + c / (1 + c)) * glassTransitionK;
}
