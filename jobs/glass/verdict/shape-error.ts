import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { type LawData, type LawFit, quadratic } from './law-fit.ts';

/** Before the data: curvature of ln E_loc over the half span, as a part of its slope q: simulated driving forces near melting make 0.05 to 0.1. */
const PART = 0.05;
const STEPS = 16;

/**
 * Variance of ln E_loc at a temperature from the law's own shape: e^(q u) has ln E straight in 1/T, and nothing says that a liquid's is. With
 * ln E = ln E0 + q u + r u², r is bounded by a prior and by what the residuals allow (one step of least squares beside the fit's own
 * parameters); what it moves E by at either end, those parameters following, is counted as an error.
 * @param fit with a free bend   @param inflation factor on standard errors for the estimated weights
 */
export function shapeVariance(d: LawData, fit: LawFit, inflation: number): (temperatureK: number) => number {
  const { jacobian, inverse, layout, q } = fit;
  if (!inverse || q === 0) return () => 0;
  const { p } = layout;
  const A = (Math.exp(fit.lnEnergy) * d.scale.dx) / GAS_CONSTANT;
  const uOf = (T: number) => (1 / T - d.scale.x0) / d.scale.dx;
  // Derivative of every whitened residual by r: as by ln K0, times d ln K/dr, and E_loc in the condition goes as 1 + r u².
  const column = new Float64Array(layout.rows);
  for (let i = 0; i < d.n; i++) {
    const j = d.instrument[i];
    const u = uOf(d.temperatureK[i] - fit.residualK[i] - fit.offsetK[j] - fit.lagS[j] * d.rate[i]);
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
  const left = Math.max(0, own - quadratic(along, 0, inverse, p));
  const follow = new Float64Array(p);
  for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) follow[a] -= inverse[a * p + b] * along[b];
  const prior = (PART * q) ** 2;
  const information = left / inflation ** 2;
  const kept = (prior * information) / (1 + prior * information);
  const mean = left > 0 ? (-kept * slope) / left : 0;
  const meanSquare = mean * mean + prior * (1 - kept);
  return (T) => {
    const u = uOf(T);
    return meanSquare * (u * u + follow[1] + u * follow[2]) ** 2;
  };
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
