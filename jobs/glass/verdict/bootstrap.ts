import { studentQuantile } from '../../numeric/distributions.ts';
import { SymmetricSolver } from '../../numeric/linear-solve.ts';
import type { Random } from '../../numeric/random.ts';
import type { LawData, LawFit } from './law-fit.ts';
import { estimateScatter } from './scatter.ts';

const ROUNDS = 3;

/**
 * Parametric bootstrap of the bend's likelihood ratio under a straight law with all lags free. The laws are linearised about the fit (they are
 * very nearly linear there), so that every draw can go through the same estimation of each instrument's scatter as the data did: with few
 * scans an instrument that, not the fit, is what widens the distribution of the ratio.
 * @param degrees degrees of freedom the interval uses   @param observed root of the likelihood ratio of the data
 * @returns p, and by how much the interval's t must grow (≥ 1) for the ratio's 95 and 98 % points to be held
 */
export function bootstrapBend(
  d: LawData,
  own: Float64Array,
  fit: LawFit,
  degrees: number,
  observed: number,
  random: Random,
  draws: number,
): { pValue: number; inflation: number } {
  const { p, rows } = fit.layout;
  const sigma = d.variance.map(Math.sqrt);
  // Derivatives in K for the scans (the priors' rows stay in units of their error), the bend's column last: whitened by the normal matrix, the
  // right-hand side then ends in the ratio of the bend to its standard error.
  const design = new Float64Array(rows * p);
  for (let k = 0; k < rows; k++) {
    for (let a = 0; a < p; a++) {
      const to = a < fit.layout.bend ? a : a === fit.layout.bend ? p - 1 : a - 1;
      design[k * p + to] = fit.jacobian[k * p + a] * (k < d.n ? sigma[k] : 1);
    }
  }
  const y = new Float64Array(rows);
  const variance = new Float64Array(d.n);
  const residual = new Float64Array(d.n);
  const leverage = new Float64Array(d.n);
  const normal = new Float64Array(p * p);
  const white = new Float64Array(p);
  const row = new Float64Array(p);
  const solver = new SymmetricSolver(p);
  const ratios = new Float64Array(draws);
  let atLeast = 0;
  for (let draw = 0; draw < draws; draw++) {
    for (let k = 0; k < rows; k++) y[k] = random.normal() * (k < d.n ? sigma[k] : 1);
    variance.set(d.variance);
    for (let round = 0; round <= ROUNDS; round++) {
      normal.fill(0);
      white.fill(0);
      for (let k = 0; k < rows; k++) {
        const w = k < d.n ? 1 / variance[k] : 1;
        for (let a = 0; a < p; a++) {
          const v = w * design[k * p + a];
          if (v === 0) continue;
          white[a] += v * y[k];
          for (let b = 0; b <= a; b++) normal[a * p + b] += v * design[k * p + b];
        }
      }
      if (!solver.factor(normal)) break;
      solver.whiten(white);
      if (round === ROUNDS) break;
      for (let i = 0; i < d.n; i++) {
        for (let a = 0; a < p; a++) row[a] = design[i * p + a];
        solver.whiten(row);
        let fitted = 0;
        let h = 0;
        for (let a = 0; a < p; a++) {
          fitted += row[a] * white[a];
          h += row[a] * row[a];
        }
        residual[i] = y[i] - fitted;
        leverage[i] = Math.min(0.999, h / variance[i]);
      }
      const scatter = estimateScatter(d, own, residual, leverage);
      for (let i = 0; i < d.n; i++) variance[i] = own[i] ** 2 + scatter.varianceK2[d.instrument[i]];
    }
    ratios[draw] = Math.abs(white[p - 1]);
    if (ratios[draw] >= observed) atLeast++;
  }
  ratios.sort();
  const point = (share: number) => ratios[Math.min(draws - 1, Math.floor(share * draws))];
  const grows = (share: number) => point(share) / studentQuantile((1 + share) / 2, degrees);
  return {
    pValue: (1 + atLeast) / (draws + 1),
    inflation: draws >= 100 ? Math.max(1, (grows(0.95) + grows(0.98)) / 2) : 1,
  };
}
