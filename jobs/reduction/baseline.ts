import { solveSymmetric } from '../numeric/linear-solve.ts';
import { type FlankSums, TERMS } from './flank-sums.ts';

/**
 * The baseline under an event: b = p0 + p1 u + p2 u² + p3 u³ + α (s0 + s1 u), u = (t − peak)/width. s0 is the step between glass or
 * liquid and crystal, s1 its slope, p2 and p3 a curvature common to both sides (drift of the instrument). Before the event α = 0, behind
 * it α = 1, so the coefficients follow from the two flanks alone by linear least squares, and only the evaluation under the event needs
 * α(t), found by iteration; with p2 = p3 = 0 this is the tangent baseline. Where a glass transition reaches into the event its logistic
 * step L(t) stands beside the event's own: b = p0 + … + p3 u³ + s0 L + s1 α.
 *
 * Which terms a pair of flanks bears cannot be read off one test without jumps, so the models are averaged with weights exp(−BIC/2)
 * (Schwarz 1978; Hoeting et al. 1999, Statist. Sci. 14:382); the spread between them is part of the covariance.
 */
export interface Baseline {
  peakS: number;
  widthS: number;
  /** p0 p1 p2 p3 s0 s1, signal units */
  coefficients: Float64Array;
  /** 6 × 6: noise of the flanks and choice of the model */
  covariance: Float64Array;
  leftS: number;
  rightS: number;
  /** What turns the left side's baseline into the right one's: the event's α, nothing (one side is followed), or a glass transition */
  side: 'both' | 'left' | 'right' | LogisticStep;
}

/** S(z) = L(z) + 4 o L(z − 1) (1 − L(z − 1)), L(z) = 1/(1 + exp(−z)), z = (t − middle)/scale, o the overshoot in parts of the step */
export interface LogisticStep {
  middleS: number;
  scaleS: number;
  overshoot?: number;
}

/** Index sets of the models, simplest first. */
const MODELS: readonly (readonly number[])[] = [
  [0, 1],
  [0, 1, 2],
  [0, 1, 4],
  [0, 1, 2, 3],
  [0, 1, 2, 4],
  [0, 1, 4, 5],
  [0, 1, 2, 3, 4],
  [0, 1, 2, 4, 5],
];
const WITHOUT_STEP = [MODELS[0], MODELS[1], MODELS[3]];
/** One flank alone is extrapolated: no curvature. */
const ONE_FLANK: readonly (readonly number[])[] = [[0], [0, 1]];
const GLASS_STEP = [MODELS[2], MODELS[4]];

/** Flanks shorter than this bear no curvature of third order and no slope step, widths. */
const SHORT_FLANK = 0.9;
/** Blocks of this length are independent of one another, and not known better than this part of the event's height. */
export const BLOCK_WIDTHS = 1 / 6;
export const BLOCK_HEIGHT_PART = 4e-4;

/** Noise that does not average out within a block is taken as independent from one stretch of this length to the next. */
export const FLICKER_WIDTHS = 0.7;

/** Models of less weight add nothing. */
const LEAST_WEIGHT = 1e-9;

export interface Flanks {
  /** bins [from, to) of either flank; empty when from ≥ to */
  left: readonly [number, number];
  right: readonly [number, number];
  /** Weight of the left bins: below 1 for the start of a hold, which is nearly baseline */
  leftWeight?: number;
}

/**
 * @param variance of one bin, what is systematic within a block included
 * @param steps which models: `free` all, `none` without a step, or with the step of a glass transition between the flanks
 * @returns undefined when the flanks together hold fewer than four bins
 */
export function fitBaseline(
  sums: FlankSums,
  flanks: Flanks,
  limits: { leftS: number; rightS: number },
  variance: number,
  steps: 'free' | 'none' | LogisticStep,
): Baseline | undefined {
  const { left, right } = flanks;
  const p = TERMS;
  const nLeft = Math.max(0, left[1] - left[0]);
  const nRight = Math.max(0, right[1] - right[0]);
  if (nLeft + nRight < 4) return undefined;
  const shorter = Math.min(sums.lengthOf(left), sums.lengthOf(right));
  const oneSided = nLeft < 3 || nRight < 3;
  const models = oneSided
    ? ONE_FLANK
    : steps === 'none'
      ? WITHOUT_STEP
      : typeof steps === 'object'
        ? GLASS_STEP
        : MODELS;
  const normal = new Float64Array(p * p);
  const rhs = new Float64Array(p);
  const squares = sums.fillNormal(left, right, normal, rhs, flanks.leftWeight ?? 1);
  const n = nLeft + nRight;
  const solved: Solved[] = [];
  // What even the fullest model leaves sets the noise where it is not white.
  let least = Number.POSITIVE_INFINITY;
  for (const used of models) {
    if (used.length + 1 > n) continue;
    if (!oneSided && shorter < SHORT_FLANK && (used.includes(3) || used.includes(5))) continue;
    const fit = solveModel(normal, rhs, squares, used);
    if (!fit) continue;
    solved.push(fit);
    least = Math.min(least, fit.chi / Math.max(1, n - used.length));
  }
  if (solved.length === 0) return undefined;
  const v = Math.max(variance, least);
  const penalty = Math.log(Math.max(4, n * Math.min(1, sums.noiseVariance / v)));
  let best = Number.POSITIVE_INFINITY;
  for (const m of solved) {
    m.score = m.chi / v + m.used.length * penalty;
    if (m.score < best) best = m.score;
  }
  let total = 0;
  for (const m of solved) total += Math.exp(-(m.score - best) / 2);
  const coefficients = new Float64Array(p);
  for (const m of solved) {
    const weight = Math.exp(-(m.score - best) / 2) / total;
    m.used.forEach((term, i) => {
      coefficients[term] += weight * m.solution[i];
    });
  }
  const covariance = new Float64Array(p * p);
  const apart = new Float64Array(p);
  for (const m of solved) {
    const weight = Math.exp(-(m.score - best) / 2) / total;
    if (weight < LEAST_WEIGHT) continue;
    const { used } = m;
    for (let i = 0; i < p; i++) apart[i] = -coefficients[i];
    for (let i = 0; i < used.length; i++) {
      apart[used[i]] += m.solution[i];
      for (let j = 0; j < used.length; j++)
        covariance[used[i] * p + used[j]] += weight * v * m.inverse[i * used.length + j];
    }
    for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) covariance[i * p + j] += weight * apart[i] * apart[j];
  }
  coefficients[0] += sums.level;
  const side = oneSided ? (nLeft < 3 ? 'right' : 'left') : typeof steps === 'object' ? steps : 'both';
  return { peakS: sums.peakS, widthS: sums.widthS, coefficients, covariance, ...limits, side };
}

/** One model's least squares: coefficients of its terms `used`, inverse of their normal matrix, sum of squares left. */
interface Solved {
  used: readonly number[];
  solution: Float64Array;
  inverse: Float64Array;
  chi: number;
  score: number;
}

function solveModel(
  normal: Float64Array,
  rhs: Float64Array,
  squares: number,
  used: readonly number[],
): Solved | undefined {
  const p = used.length;
  const inverse = new Float64Array(p * p);
  const solution = new Float64Array(p);
  for (let i = 0; i < p; i++) {
    solution[i] = rhs[used[i]];
    for (let j = 0; j < p; j++) inverse[i * p + j] = normal[used[i] * TERMS + used[j]];
  }
  if (!solveSymmetric(inverse, solution, p)) return undefined;
  let explained = 0;
  for (let i = 0; i < p; i++) explained += solution[i] * rhs[used[i]];
  return { used, solution, inverse, chi: Math.max(0, squares - explained), score: 0 };
}

/** Values of the six terms at time t (s) and conversion α. */
export function fillTerms(b: Baseline, t: number, alpha: number, terms: Float64Array): void {
  const u = (t - b.peakS) / b.widthS;
  terms[0] = 1;
  terms[1] = u;
  terms[2] = u * u;
  terms[3] = u * u * u;
  const { side } = b;
  if (typeof side === 'object') {
    terms[4] = stepAt(side, t);
    terms[5] = alpha;
    return;
  }
  terms[4] = stepShare(side, alpha);
  terms[5] = terms[4] * u;
}

/** Baseline at time t (s) and conversion α. */
export function baselineAt(b: Baseline, t: number, alpha: number): number {
  const u = (t - b.peakS) / b.widthS;
  const c = b.coefficients;
  const { side } = b;
  const smooth = c[0] + u * (c[1] + u * (c[2] + u * c[3]));
  if (typeof side === 'object') return smooth + c[4] * stepAt(side, t) + c[5] * alpha;
  return smooth + stepShare(side, alpha) * (c[4] + c[5] * u);
}

/** What conversion adds to the baseline at time t for each unit of α: a + b (t − peak). */
export function conversionStep({ side, coefficients: c, widthS }: Baseline): { level: number; slope: number } {
  if (typeof side === 'object') return { level: c[5], slope: 0 };
  return side === 'both' ? { level: c[4], slope: c[5] / widthS } : { level: 0, slope: 0 };
}

function stepAt({ middleS, scaleS, overshoot = 0 }: LogisticStep, t: number): number {
  const z = (t - middleS) / scaleS;
  const logistic = 1 / (1 + Math.exp(-z));
  if (overshoot === 0) return logistic;
  const behind = 1 / (1 + Math.exp(1 - z));
  return logistic + 4 * overshoot * behind * (1 - behind);
}

const stepShare = (side: 'both' | 'left' | 'right', alpha: number): number =>
  side === 'both' ? alpha : side === 'right' ? 1 : 0;
