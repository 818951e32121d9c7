import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { type BentScale, bendTerm } from '../../laws/bend.ts';

/**
 * At which rate a characteristic temperature of a JMAK event comes to lie at T, for the bent law (METHODS 8, one order further).
 *
 * On a ramp X(T) = ∫K dT/β = (K g/β)(1 − g' + g'² + g g'' − …), g = R T²/E_loc (repeated partial integration; for Arrhenius the series
 * 1 − 2ε + 6ε² of the temperature integral, ε = R T/E). Each characteristic temperature has its own X:
 *   T at conversion α: ln X = ln(−ln(1−α))/n;
 *   peak: (n−1)/X − n X^(n−1) + 1/(X(1 + g')) ≈ 0, so ln X = −g'/n²;
 *   time centroid: n ln X has the distribution of the logarithm of an exponential variable (mean −γ, variance π²/6), so
 *   ln X = −γ/n + g' π²/(12 n²) to second order in the width.
 * What does not depend on T is part of ln K0 here (`constantOf` takes it out); what does is −κ g'.
 */
export type Characteristic = 'centroid' | 'peak' | 'half';

const EULER = 0.5772156649015329;

/** κ in ln β = ln K + ln g + ln(1 − g' + …) − κ g' + constant. @param n Avrami exponent */
export function kappaOf(what: Characteristic, n: number): number {
  if (what === 'centroid') return (Math.PI * Math.PI) / (12 * n * n);
  return what === 'peak' ? -1 / (n * n) : 0;
}

/** ln K0 as fitted on a characteristic temperature − ln K0 of the law itself. */
export function constantOf(what: Characteristic, n: number): number {
  if (what === 'centroid') return EULER / n;
  return what === 'peak' ? 0 : -Math.log(Math.LN2) / n;
}

/** ln β at T with its derivatives; made once, filled in place. */
export interface ConditionValue {
  value: number;
  byTemperature: number;
  byLogEnergy: number;
  byBend: number;
}

/** The smallest 1 + g' the expansion is used at: below it (a strongly inverted bend at a low energy) it has no meaning. */
const LEAST = 0.2;

/** @param lnK0 at the scale's middle   @param lnEnergy ln(E0 / (J/mol))   @param q bend parameter */
export function evaluateCondition(
  temperatureK: number,
  lnK0: number,
  lnEnergy: number,
  q: number,
  scale: BentScale,
  kappa: number,
  out: ConditionValue,
): void {
  const T = temperatureK;
  const u = (1 / T - scale.x0) / scale.dx;
  const energy0 = Math.exp(lnEnergy);
  const term = bendTerm(q, u);
  const A = (energy0 * scale.dx) / GAS_CONSTANT;
  const perEnergy = GAS_CONSTANT / (energy0 * Math.exp(q * u));
  const g = perEnergy * T * T;
  const slope = q / scale.dx;
  const g1 = perEnergy * (2 * T + slope);
  const g2 = perEnergy * (2 + (slope * (2 * T + slope)) / (T * T));
  const plus = Math.max(LEAST, 1 + g1);
  const second = g * g2;
  out.value = lnK0 - A * term.value + Math.log(g) - Math.log(plus) + second - kappa * g1;
  const byG1 = -1 / plus - kappa;
  out.byTemperature = 1 / g + g1 / g + byG1 * g2;
  out.byLogEnergy = -A * term.value - 1 - byG1 * g1 - 2 * second;
  out.byBend = -A * term.byQ - u + byG1 * (perEnergy / scale.dx - u * g1);
}

/** T at which the condition holds for ln β, by Newton from `start`. Fills `out` at the solution. */
export function solveCondition(
  lnRate: number,
  start: number,
  lnK0: number,
  lnEnergy: number,
  q: number,
  scale: BentScale,
  kappa: number,
  out: ConditionValue,
): number {
  let T = start;
  for (let i = 0; i < 30; i++) {
    evaluateCondition(T, lnK0, lnEnergy, q, scale, kappa, out);
    const step = (lnRate - out.value) / out.byTemperature;
    T += Math.max(-0.1 * T, Math.min(0.1 * T, step));
    if (!(Math.abs(step) > 1e-9 * T)) break;
  }
  return T;
}
