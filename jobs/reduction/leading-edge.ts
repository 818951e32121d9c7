import { LeastSquares } from '../numeric/least-squares.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';

export interface LeadingEdge {
  /** Where the straight part of the rise meets the baseline, s, and its standard error */
  onsetS: number;
  errorS: number;
  /** of the straight part, signal units/s */
  slope: number;
}

/** Baseline taken in before the edge, part of the edge's length. */
const BEFORE = 0.6;
/** Time constant the fit starts from, part of the edge's length; below this part of a bin it is not seen. */
const START = 0.05;
const LEAST_BINS = 0.3;

/**
 * Rise of a pure metal's melting behind a first-order response: k (s + r exp(−(s + r)/r)) with s = t − onset, from s = −r on; the onset is
 * where its straight part meets the baseline (ISO 11357-1). All of the edge carries it, not its upper part alone: the error of the onset
 * is less than half of a line's.
 * @param e excess over the baseline by time t   @param line a first estimate   @param to first row behind the edge, `from` first with excess
 * @returns undefined where the fit does not converge to such an edge: the line stands then
 */
export function fitLeadingEdge(
  t: Float64Array,
  e: Float64Array,
  line: LeadingEdge,
  from: number,
  to: number,
): LeadingEdge | undefined {
  const lengthS = t[to - 1] - line.onsetS;
  const begin = Math.max(from, lowerBound(t, line.onsetS - BEFORE * lengthS));
  const n = to - begin;
  const least = LEAST_BINS * (t[begin + 1] - t[begin]);
  const model = (fixedR?: number) => (p: Float64Array, residuals: Float64Array, jacobian: Float64Array) => {
    const [k, onset] = p;
    const r = fixedR ?? Math.exp(p[2]);
    const width = p.length;
    for (let i = 0; i < n; i++) {
      const s = t[begin + i] - onset;
      const below = s <= -r;
      const fall = below ? 0 : Math.exp(-(s + r) / r);
      const rise = below ? 0 : s + r * fall;
      residuals[i] = k * rise - e[begin + i];
      jacobian[i * width] = rise;
      jacobian[i * width + 1] = below ? 0 : -k * (1 - fall);
      // Of ln r, so that r stays above zero.
      if (width === 3) jacobian[i * width + 2] = below ? 0 : k * r * fall * (1 + s / r);
    }
  };
  const start = [line.slope, line.onsetS];
  const scale = [line.slope, lengthS];
  const free = new LeastSquares(n, 3, model()).solve(
    Float64Array.from([...start, Math.log(Math.max(START * lengthS, least))]),
    Float64Array.from([...scale, 1]),
    80,
    1e-6,
  );
  const seen = free.converged && Math.exp(free.parameters[2]) > least;
  const fit = seen
    ? free
    : new LeastSquares(n, 2, model(least)).solve(Float64Array.from(start), Float64Array.from(scale), 50, 1e-6);
  const [slope, onsetS] = fit.parameters;
  const variance = fit.covariance?.[fit.parameters.length + 1] ?? 0;
  const near = Math.abs(onsetS - line.onsetS) < BEFORE * lengthS && slope > 0.5 * line.slope && slope < 2 * line.slope;
  return fit.converged && near && variance > 0 ? { onsetS, slope, errorS: Math.sqrt(variance) } : undefined;
}
