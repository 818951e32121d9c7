import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { type LawData, type LawFit, quadratic } from './law-fit.ts';

/** Before the data: curvature of ln E_loc over the half span, as a part of its slope q: simulated driving forces near melting make 0.05 to 0.1. */
const PART = 0.05;
const STEPS = 16;

/** What the residuals say of r in ln E_loc = ln E0 + q u + r u², one step of least squares beside the fit's own parameters. */
interface Curvature {
  r: number;
  /** 1/variance of r by the weights */
  information: number;
  /** by how much ln E0 and q follow r */
  follow: readonly [number, number];
}

/** @param fit with a free bend  @returns undefined where its parameters are not determined */
function fitCurvature(d: LawData, fit: LawFit): Curvature | undefined {
  const { jacobian, inverse, layout, q } = fit;
  if (!inverse) return undefined;
  const { p } = layout;
  const A = (Math.exp(fit.lnEnergy) * d.scale.dx) / GAS_CONSTANT;
  // Derivative of every whitened residual by r: as by ln K0, times d ln K/dr, and E_loc in the condition goes as 1 + r u².
  const column = new Float64Array(layout.rows);
  for (let i = 0; i < d.n; i++) {
    const j = d.instrument[i];
    const T = d.temperatureK[i] - fit.residualK[i] - fit.offsetK[j] - fit.lagS[j] * d.rate[i];
    const u = (1 / T - d.scale.x0) / d.scale.dx;
    column[i] = jacobian[i * p] * (-A * curvedTerm(q, u) - u * u);
  }
  const along = new Float64Array(p);
  let own = 0;
  let slope = 0;
  for (let i = 0; i < d.n; i++) {
    own += column[i] * column[i];
    // Residuals of the fit are measured − law, in K; whitened ones are law − measured.
    slope -= (column[i] * fit.residualK[i]) / Math.sqrt(d.variance[i]);
    for (let a = 0; a < p; a++) along[a] += column[i] * jacobian[i * p + a];
  }
  const information = own - quadratic(along, 0, inverse, p);
  const follow = [0, 0] as [number, number];
  for (let b = 0; b < p; b++) {
    follow[0] -= inverse[p + b] * along[b];
    follow[1] -= inverse[2 * p + b] * along[b];
  }
  return information > 0 ? { r: -slope / information, information, follow } : undefined;
}

/**
 * Variance of ln E_loc at a temperature from the law's own shape: e^(q u) has ln E straight in 1/T, and nothing says that a liquid's is. r is
 * bounded by a prior and by the residuals; what it moves E by at either end, the fit's parameters following, is counted as an error.
 * @param fit with a free bend   @param inflation factor on standard errors for the estimated weights
 */
export function shapeVariance(d: LawData, fit: LawFit, inflation: number): (temperatureK: number) => number {
  const found = fit.q === 0 ? undefined : fitCurvature(d, fit);
  if (!found) return () => 0;
  const prior = (PART * fit.q) ** 2;
  const information = found.information / inflation ** 2;
  const kept = (prior * information) / (1 + prior * information);
  const meanSquare = (kept * found.r) ** 2 + prior * (1 - kept);
  return (T) => {
    const u = (1 / T - d.scale.x0) / d.scale.dx;
    return meanSquare * (u * u + found.follow[0] + u * found.follow[1]) ** 2;
  };
}

/** By how much the deviance would change with another law of as many parameters in the place of the bent one; below 0 it fits better. */
export interface RivalShapes {
  vft: number;
  myega: number;
}

/**
 * The physical laws of a liquid beside e^(q u), to first order: with the same slope of ln E_loc in the middle each has a curvature of its own.
 * VFT: E_loc ∝ (1 − T0/T)^−2, so r = q²/4. MYEGA: E_loc ∝ e^(a x) (1 + a x) with a + a/(1 + a x0) = q/Δx, so r = −(a Δx/(1 + a x0))²/2.
 * @param fit with a free bend  @returns undefined for a bend that no such liquid has
 */
export function rivalShapes(d: LawData, fit: LawFit): RivalShapes | undefined {
  const { q } = fit;
  const found = q > 0 ? fitCurvature(d, fit) : undefined;
  if (!found) return undefined;
  const { x0, dx } = d.scale;
  // a x0 =: z solves z + z/(1 + z) = s, s = q x0/Δx: z² + (2 − s) z − s = 0.
  const s = (q * x0) / dx;
  const z = (s - 2 + Math.sqrt((s - 2) ** 2 + 4 * s)) / 2;
  const change = (r: number) => found.information * ((r - found.r) ** 2 - found.r ** 2);
  return { vft: change((q * q) / 4), myega: change(-0.5 * ((z * dx) / (x0 * (1 + z))) ** 2) };
}

/** ∫_0^u v² e^(q v) dv by Simpson's rule: for |q u| < 3 exact to 1e-5. */
function curvedTerm(q: number, u: number): number {
  const h = u / STEPS;
  let sum = 0;
  for (let k = 0; k <= STEPS; k++) {
    const v = k * h;
    sum += (k === 0 || k === STEPS ? 1 : k % 2 ? 4 : 2) * v * v * Math.exp(q * v);
  }
  return (sum * h) / 3;
}
