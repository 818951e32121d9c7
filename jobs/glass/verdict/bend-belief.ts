import type { BendAnalysis } from './analyse.ts';
import type { LawFit } from './law-fit.ts';

/** Before the data: no bend at all as likely as some, and some of this size in ln E a decade of rate, either way (two-fold over six). */
const NONE = 0.5;
const PER_DECADE = 0.12;

export interface BendBelief {
  /** of q over both possibilities, and the mean of its square: what is left of it even where none is the likelier */
  mean: number;
  meanSquare: number;
}

/**
 * What the data leave of a bend that they do not prove: averaged over a law without bend and one with it, weighted by how well each
 * explains the bend that was fitted (Bayesian model averaging with a point mass; Hoeting, Madigan, Raftery & Volinsky 1999, Stat. Sci. 14:382).
 * @param bent the law with a free bend
 */
export function believeBend({ data, span, inflation }: BendAnalysis, bent: LawFit): BendBelief {
  const decades = Math.log10(Math.max(...data.rate) / Math.min(...data.rate));
  const slab = ((PER_DECADE * decades) / span) ** 2;
  const variance =
    bent.converged && bent.inverse ? bent.inverse[2 * bent.layout.p + 2] * inflation ** 2 : Number.POSITIVE_INFINITY;
  if (!(variance < Number.POSITIVE_INFINITY)) return { mean: 0, meanSquare: (1 - NONE) * slab };
  const kept = slab / (slab + variance);
  const lnOdds = Math.log((1 - NONE) / NONE) + 0.5 * Math.log(1 - kept) + (0.5 * kept * bent.q * bent.q) / variance;
  const some = 1 / (1 + Math.exp(-lnOdds));
  const mean = kept * bent.q;
  return { mean: some * mean, meanSquare: some * (mean * mean + kept * variance) };
}
