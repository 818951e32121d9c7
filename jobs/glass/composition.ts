import { LeastSquares, type LeastSquaresResult } from '../numeric/least-squares.ts';

/** Gordon & Taylor 1952 (J. Appl. Chem. 2:493): Tg(w) = [(1 − w) Tg1 + k w Tg2]/[(1 − w) + k w], w the mass fraction of the solvent. */
export interface GordonTaylor {
  solidK: number;
  solventK: number;
  k: number;
}

export function glassTransitionOfMixture({ solidK, solventK, k }: GordonTaylor, solventFraction: number): number {
  const w = solventFraction;
  return ((1 - w) * solidK + k * w * solventK) / (1 - w + k * w);
}

export interface GordonTaylorFit {
  law: GordonTaylor;
  /** standard errors of the free parameters, undefined with as many points as parameters */
  errors?: { solidK: number; k: number; solventK?: number };
  residualK: Float64Array;
  fit: LeastSquaresResult;
}

/**
 * Least squares of Tg(w) over the samples of a series.
 * @param points two or more compositions; three or more unless `solventK` is given
 * @param solventK Tg of the pure solvent where it is known (water: 136 K, common practice)
 * @returns undefined with too few distinct compositions
 */
export function fitGordonTaylor(
  points: readonly { solventFraction: number; glassTransitionK: number }[],
  solventK?: number,
): GordonTaylorFit | undefined {
  const distinct = new Set(points.map((p) => p.solventFraction)).size;
  const free = solventK === undefined ? 3 : 2;
  if (distinct < free) return undefined;
  const n = points.length;
  const solver = new LeastSquares(n, free, (p, r, J) => {
    const law = { solidK: p[0], k: Math.exp(p[1]), solventK: solventK ?? p[2] };
    points.forEach(({ solventFraction: w, glassTransitionK }, i) => {
      const below = 1 - w + law.k * w;
      const T = glassTransitionOfMixture(law, w);
      r[i] = T - glassTransitionK;
      J[i * free] = (1 - w) / below;
      J[i * free + 1] = (law.k * w * (law.solventK - T)) / below;
      if (free === 3) J[i * free + 2] = (law.k * w) / below;
    });
  });
  const driest = points.reduce((a, b) => (b.solventFraction < a.solventFraction ? b : a)).glassTransitionK;
  const start = [driest, 0, ...(free === 3 ? [driest / 2] : [])];
  const fit = solver.solve(Float64Array.from(start), Float64Array.from([10, 0.1, 10].slice(0, free)), 200);
  const p = fit.parameters;
  const law = { solidK: p[0], k: Math.exp(p[1]), solventK: solventK ?? p[2] };
  const error = (at: number) => Math.sqrt(fit.covariance?.[at * (free + 1)] ?? Number.NaN);
  return {
    law,
    ...(n > free &&
      fit.covariance && {
        errors: { solidK: error(0), k: law.k * error(1), ...(free === 3 && { solventK: error(2) }) },
      }),
    residualK: Float64Array.from(points, (q) => q.glassTransitionK - glassTransitionOfMixture(law, q.solventFraction)),
    fit,
  };
}
