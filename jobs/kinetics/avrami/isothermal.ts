import { LeastSquares, type LeastSquaresResult } from '../../numeric/least-squares.ts';
import { fitLine } from '../../numeric/line.ts';

/** One hold fitted by α = 1 − exp{−[K (t − t0)]^n}. */
export interface HoldEstimate {
  /** ln K, K in 1/s: the law is written with (K t)^n, so that E follows from ln K itself (with exp(−k tⁿ), K = k^(1/n)) */
  lnRate: number;
  exponent: number;
  /** s, on the clock of the curve */
  startS: number;
  /** the start was held at the moment the hold was reached */
  bounded: boolean;
  residualRms: number;
  residuals: Float64Array;
  /** of (ln K, n, t0): 3 × 3; with the start at its bound of (ln K, n): 2 × 2 */
  fit: LeastSquaresResult;
}

/** Starts tried for t0, as parts of the way from the hold's beginning to the first row. */
const STARTS = [0, 0.5, 0.9];

/**
 * Isothermal Johnson–Mehl–Avrami–Kolmogorov with a fitted induction time: ln K, n and t0 in one least-squares fit on α, t0 not before the
 * hold is reached (t0 wrong by 5 % of t½ moves n = 3 by 0.17).
 * @param timeS increasing, s   @param conversion 0 … 1 at each time   @param reachedS s, when the hold temperature was reached
 */
export function fitHold(timeS: Float64Array, conversion: ArrayLike<number>, reachedS: number): HoldEstimate {
  const rows = timeS.length;
  const half = timeS[rows >> 1] - reachedS;
  const evaluate = (p: Float64Array, r: Float64Array, J: Float64Array, startS: number, width: 2 | 3) => {
    const [lnK, n] = p;
    if (!(n > 0.05) || n > 50) {
      r.fill(Number.POSITIVE_INFINITY);
      return;
    }
    for (let i = 0; i < rows; i++) {
      const t = timeS[i] - startS;
      const u = t > 0 ? lnK + Math.log(t) : Number.NEGATIVE_INFINITY;
      const X = Math.exp(n * u);
      const slope = t > 0 ? Math.exp(-X) * X : 0;
      r[i] = 1 - Math.exp(-X) - conversion[i];
      J[i * width] = slope * n;
      J[i * width + 1] = t > 0 ? slope * u : 0;
      if (width === 3) J[i * width + 2] = t > 0 ? (-slope * n) / t : 0;
    }
  };
  const free = new LeastSquares(rows, 3, (p, r, J) => evaluate(p, r, J, p[2], 3));
  let best: LeastSquaresResult | undefined;
  for (const part of STARTS) {
    const startS = reachedS + part * Math.max(0, timeS[0] - reachedS);
    const fit = free.solve(
      Float64Array.of(...roughStart(timeS, conversion, startS), startS),
      Float64Array.of(1, 1, half),
      100,
    );
    if (!best || fit.sumOfSquares < best.sumOfSquares) best = fit;
    if (fit.converged) break;
  }
  let fit = best as LeastSquaresResult;
  let startS = fit.parameters[2];
  const bounded = !(startS >= reachedS);
  if (bounded) {
    startS = reachedS;
    const held = new LeastSquares(rows, 2, (p, r, J) => evaluate(p, r, J, reachedS, 2));
    fit = held.solve(Float64Array.of(...roughStart(timeS, conversion, reachedS)), Float64Array.of(1, 1), 100);
  }
  const residuals = new Float64Array(rows);
  evaluate(fit.parameters, residuals, new Float64Array(rows * 2), startS, 2);
  return {
    lnRate: fit.parameters[0],
    exponent: fit.parameters[1],
    startS,
    bounded,
    residualRms: Math.sqrt(fit.sumOfSquares / rows),
    residuals,
    fit,
  };
}

/** ln K and n from the line of ln[−ln(1−α)] against ln(t − t0). */
function roughStart(timeS: Float64Array, conversion: ArrayLike<number>, startS: number): [number, number] {
  const x: number[] = [];
  const y: number[] = [];
  for (let i = 0; i < timeS.length; i++) {
    if (!(timeS[i] > startS) || conversion[i] < 0.1 || conversion[i] > 0.9) continue;
    x.push(Math.log(timeS[i] - startS));
    y.push(Math.log(-Math.log1p(-conversion[i])));
  }
  if (x.length < 3) return [-Math.log(timeS[timeS.length >> 1] - startS), 2];
  const { slope, intercept } = fitLine(x, y);
  const n = Math.min(8, Math.max(0.3, slope));
  return [intercept / n, n];
}

/**
 * Local exponent n(α) = d ln[−ln(1−α)]/d ln(t − t0) by lines over five neighbouring rows; rows not after t0 give NaN.
 */
export function localExponent(timeS: Float64Array, conversion: ArrayLike<number>, startS: number): Float64Array {
  const rows = timeS.length;
  return Float64Array.from(timeS, (_, i) => {
    const from = Math.max(0, Math.min(rows - 5, i - 2));
    const at = Array.from({ length: Math.min(5, rows) }, (_, k) => from + k);
    if (at.some((k) => !(timeS[k] > startS))) return Number.NaN;
    return fitLine(
      at.map((k) => Math.log(timeS[k] - startS)),
      at.map((k) => Math.log(-Math.log1p(-conversion[k]))),
    ).slope;
  });
}
