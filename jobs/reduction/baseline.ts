import { solveSymmetric } from '../numeric/linear-solve.ts';
import type { EventWindow } from './window.ts';

/**
 * The conversion-weighted baseline under an event: b = p0 + p1 u + p2 u² + α (s0 + s1 u), u = (t − peak)/width.
 * Before the event α = 0, behind it α = 1, so its five coefficients follow from the two flanks alone by linear least squares, and only
 * the evaluation under the event needs α(t), found by iteration. s0 is the step between glass or liquid and crystal, s1 its slope,
 * p2 a curvature common to both sides (instrument drift): with p2 = 0 this is the tangent baseline of METHODS 4.3.
 * p2 is fitted where both flanks are long, else p2 and s1 only where they stand out of the noise, since a needless term costs precision
 * under the event.
 */
export interface Baseline {
  peakS: number;
  widthS: number;
  coefficients: Float64Array;
  leftS: number;
  rightS: number;
  /** root mean square residual of the flanks, signal units */
  residual: number;
}

/** Longest flanks, in widths; the first that fit to the noise are taken, so that a glass transition or melting nearby is left out. */
const FLANKS = [3, 2, 1.3, 0.8, 0.5];
/** Both flanks at least this long: a common curvature is always fitted, widths. */
const CURVATURE_FROM = 1.2;
/** Least signal-to-error of an optional term for it to be kept. */
const TERM_SIGMAS = 4;
/** No curvature or slope step is looked for with a flank shorter than this, widths. */
const SHORTEST_FOR_TERMS = 0.5;
/** A flank is good when its block means stay within this many errors, plus this part of the event's height. */
const BLOCK_SIGMAS = 3.5;
const BLOCK_HEIGHT_PART = 0.004;

/**
 * Fits the flanks beside [leftS, rightS].
 * @returns undefined when a side has fewer than four bins: the event is cut there
 */
export function fitBaseline(
  w: EventWindow,
  peakS: number,
  widthS: number,
  leftS: number,
  rightS: number,
  height: number,
): Baseline | undefined {
  let best: Baseline | undefined;
  let bestScore = Number.POSITIVE_INFINITY;
  for (const left of FLANKS) {
    for (const right of FLANKS) {
      const tried = tryFlanks(w, peakS, widthS, leftS, rightS, left, right, height);
      if (!tried) continue;
      if (tried.score <= 1) return tried.baseline;
      // No flank is clean: the least bad one, longer ones preferred (they come first).
      if (tried.score < bestScore) {
        bestScore = tried.score;
        best = tried.baseline;
      }
    }
  }
  return best;
}

function tryFlanks(
  w: EventWindow,
  peakS: number,
  widthS: number,
  leftS: number,
  rightS: number,
  leftWidths: number,
  rightWidths: number,
  height: number,
): { baseline: Baseline; score: number } | undefined {
  const from = leftS - leftWidths * widthS;
  const to = rightS + rightWidths * widthS;
  const rows: number[] = [];
  let nLeft = 0;
  let nRight = 0;
  for (let i = 0; i < w.t.length; i++) {
    const t = w.t[i];
    if (t >= from && t <= leftS) nLeft++;
    else if (t >= rightS && t <= to) nRight++;
    else continue;
    rows.push(i);
  }
  if (nLeft < 4 || nRight < 4) return undefined;
  const leftLength = (leftS - Math.max(from, w.t[0])) / widthS;
  const rightLength = (Math.min(to, w.t[w.t.length - 1]) - rightS) / widthS;
  const shorter = Math.min(leftLength, rightLength);
  const solveWith = (curvature: boolean, slopeStep: boolean) =>
    solve(w, rows, nLeft, peakS, widthS, curvature, slopeStep);
  let solved = solveWith(shorter >= CURVATURE_FROM, false);
  if (shorter >= SHORTEST_FOR_TERMS) {
    // A term that a long flank takes anyway, or that no flank must have, is kept where it stands out of the noise.
    if (shorter < CURVATURE_FROM) solved = keepIfSeen(solved, solveWith(true, false), 2);
    const curvature = solved !== undefined && solved.coefficients[2] !== 0;
    solved = keepIfSeen(solved, solveWith(curvature, true), 4);
  }
  if (!solved) return undefined;
  const baseline: Baseline = {
    peakS,
    widthS,
    coefficients: solved.coefficients,
    leftS,
    rightS,
    residual: solved.residual,
  };
  return { baseline, score: blockScore(w, rows, nLeft, solved.residuals, height) };
}

interface Solved {
  coefficients: Float64Array;
  errors: Float64Array;
  residuals: Float64Array;
  residual: number;
}

function keepIfSeen(without: Solved | undefined, withTerm: Solved | undefined, term: number): Solved | undefined {
  if (!withTerm) return without;
  return Math.abs(withTerm.coefficients[term]) > TERM_SIGMAS * withTerm.errors[term] ? withTerm : without;
}

function solve(
  w: EventWindow,
  rows: number[],
  nLeft: number,
  peakS: number,
  widthS: number,
  curved: boolean,
  slopeStep: boolean,
): Solved | undefined {
  const used = curved ? (slopeStep ? [0, 1, 2, 3, 4] : [0, 1, 2, 3]) : slopeStep ? [0, 1, 3, 4] : [0, 1, 3];
  const p = used.length;
  const normal = new Float64Array(p * p);
  const rhs = new Float64Array(p);
  const term = new Float64Array(5);
  const fill = (k: number) => {
    const u = (w.t[rows[k]] - peakS) / widthS;
    const a = k < nLeft ? 0 : 1;
    term[0] = 1;
    term[1] = u;
    term[2] = u * u;
    term[3] = a;
    term[4] = a * u;
  };
  for (let k = 0; k < rows.length; k++) {
    fill(k);
    const y = w.y[rows[k]];
    for (let i = 0; i < p; i++) {
      rhs[i] += term[used[i]] * y;
      for (let j = 0; j <= i; j++) normal[i * p + j] += term[used[i]] * term[used[j]];
    }
  }
  for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) normal[j * p + i] = normal[i * p + j];
  if (!solveSymmetric(normal, rhs, p)) return undefined;
  const coefficients = new Float64Array(5);
  used.forEach((c, i) => {
    coefficients[c] = rhs[i];
  });
  const residuals = new Float64Array(rows.length);
  let sum = 0;
  for (let k = 0; k < rows.length; k++) {
    fill(k);
    let b = 0;
    for (let c = 0; c < 5; c++) b += coefficients[c] * term[c];
    residuals[k] = w.y[rows[k]] - b;
    sum += residuals[k] ** 2;
  }
  const variance = sum / Math.max(1, rows.length - p);
  const errors = new Float64Array(5);
  used.forEach((c, i) => {
    errors[c] = Math.sqrt(normal[i * p + i] * variance);
  });
  return { coefficients, errors, residuals, residual: Math.sqrt(sum / rows.length) };
}

/** Largest block mean of the flank residuals ÷ what noise allows; up to 1 the flanks hold nothing but baseline. */
function blockScore(w: EventWindow, rows: number[], nLeft: number, residuals: Float64Array, height: number): number {
  let worst = 0;
  for (const [from, to] of [
    [0, nLeft],
    [nLeft, rows.length],
  ]) {
    const size = Math.max(4, Math.floor((to - from) / 8));
    for (let b = from; b + size <= to; b += size) {
      let sum = 0;
      for (let k = b; k < b + size; k++) sum += residuals[k];
      const allowed = (BLOCK_SIGMAS * w.noise) / Math.sqrt(size) + BLOCK_HEIGHT_PART * height;
      worst = Math.max(worst, Math.abs(sum / size) / allowed);
    }
  }
  return worst;
}

/** Baseline at time t (s) and conversion α. */
export function baselineAt(b: Baseline, t: number, alpha: number): number {
  const u = (t - b.peakS) / b.widthS;
  const c = b.coefficients;
  return c[0] + u * (c[1] + u * c[2]) + alpha * (c[3] + c[4] * u);
}
