import { LeastSquares } from '../numeric/least-squares.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';
import type { Baseline } from './baseline.ts';
import { FLANK, RAMP_REACH, type Room } from './event-limits.ts';
import {
  eventClock,
  fillShape,
  JMAK_TURN,
  shapeAt,
  TOP_OF_JMAK,
  tailByTurn,
  tailOfTurn,
  WIDTH_IN_V,
} from './event-model.ts';
import type { Bell } from './excess.ts';
import { TERMS } from './flank-sums.ts';
import { type GlassTransition, stepOf } from './glass-transition.ts';
import type { EventWindow } from './window.ts';

/**
 * A glass transition that reaches into the event behind it leaves no baseline between them: neither can be told without the other. The whole
 * trace is fitted at once,
 *   y = p0 + p1 u + p2 u² + p3 u³ + s α(v) + g S((u − c)/d) + A b X' r(v),   u = (t − peak)/width,   S(z) = L(z) + 4 o L(z − 1) (1 − L(z − 1)),
 * with the event of event-model.ts, its own step s from liquid to crystal, and a logistic step g < 0 below the event with the overshoot o of
 * an aged glass; and again without this step. The step stands where it lowers BIC by more than LEAST_GAIN and leaves little of the misfit.
 */
export interface StepUnderEvent {
  baseline: Omit<Baseline, 'leftS' | 'rightS'>;
  glass: GlassTransition;
  /** one standard error of the event's area, signal units × s */
  areaError: number;
}

const PLAIN = 9;
const WITH_STEP = 12;
const WITH_OVERSHOOT = 13;
const [CRYSTAL, AREA, PEAK, STEEPNESS, TURN, STEP, MIDDLE, SPREAD, OVERSHOOT] = [4, 5, 6, 7, 8, 9, 10, 11, 12];

/** Rows of the fit. */
const MOST_ROWS = 300;
/** What is fitted, widths before and behind the peak. */
const REACH = { before: 6, behind: 4 };
/** Middles tried, half widths of the left side before the peak, and spreads of the step, widths. */
const MIDDLES = { from: -4.5, to: -0.8, step: 0.1 };
const SPREADS = [0.06, 0.12, 0.25];
/** A real event is not quite of these shapes: this part of its height counts as noise. */
const SHAPE_ERROR = 0.002;
const TAIL_SPREAD = 0.3;
/** What the shape leaves open of the area: Šesták–Berggren events are off by twice this part (study `reduction`). */
const SHAPE_AREA_PART = 0.004;
const LEAST_GAIN = 12;
/** Part of the misfit without the step that may be left with it. */
const MISFIT_LEFT = 0.4;
const LEAST_HEIGHT_PART = 0.01;
const LEAST_SIGMAS = 7;
/** Nearer to the peak, or broader than this, widths, a step only mends a shape that is none of the family. */
const NEAREST = -0.6;
const BROADEST = 0.25;

/** @param bell rough, of the one event there is   @returns undefined where no step is needed, or none is found */
export function fitStepUnderEvent(w: EventWindow, bell: Bell, room: Room): StepUnderEvent | undefined {
  const width = bell.leftS + bell.rightS;
  const fromS = Math.max(room.fromS, w.t[0], bell.peakS - REACH.before * width);
  const toS = Math.min(room.toS, room.melting?.fromS ?? room.toS, bell.peakS + REACH.behind * width);
  if (toS < bell.peakS + RAMP_REACH.right.near * bell.rightS + FLANK.least * width) return undefined;
  const rows = coarser(w, lowerBound(w.t, fromS), lowerBound(w.t, toS));
  const n = rows.t.length;
  if (n < 4 * WITH_STEP) return undefined;
  const model = wholeModel(rows, bell, width);
  const scale = new Float64Array(WITH_OVERSHOOT).fill(1);
  scale[PEAK] = 1 / Math.exp(model.start[STEEPNESS]);
  scale[MIDDLE] = 0.1;
  const without = model.fit(PLAIN).solve(model.start.slice(0, PLAIN), scale, 40, 1e-4);
  const variance = (rows.noise / bell.height) ** 2 + SHAPE_ERROR ** 2;
  const misfit = (sum: number) => Math.max(0, sum / n - variance);
  const better = (sum: number, before: number, more: number) =>
    (before - sum) / variance - more * Math.log(n) > LEAST_GAIN;
  const added = WITH_STEP - PLAIN;
  const start = bestStart(model, without.parameters, n, bell.leftS / width);
  if (!start || !better(without.sumOfSquares - start.gain, without.sumOfSquares, added)) return undefined;
  const plain = model.fit(WITH_STEP).solve(start.parameters, scale, 60, 1e-4);
  const aged = model.fit(WITH_OVERSHOOT).solve(Float64Array.from([...plain.parameters, 0]), scale, 60, 1e-4);
  const found = better(aged.sumOfSquares, plain.sumOfSquares, 1) ? aged : plain;
  const q = found.parameters;
  const { covariance } = found;
  if (!covariance || !q.every(Number.isFinite)) return undefined;
  const height = -q[STEP];
  const c = (i: number, j: number) => covariance[i * q.length + j];
  if (!better(plain.sumOfSquares, without.sumOfSquares, added) || !(height > LEAST_HEIGHT_PART)) return undefined;
  if (height < LEAST_SIGMAS * Math.sqrt(c(STEP, STEP))) return undefined;
  if (misfit(found.sumOfSquares) > MISFIT_LEFT * misfit(without.sumOfSquares) + variance * 3 * Math.sqrt(2 / n))
    return undefined;
  const middleS = bell.peakS + q[MIDDLE] * width;
  const scaleS = Math.exp(q[SPREAD]) * width;
  if (middleS - 2 * scaleS < rows.t[0] || q[MIDDLE] > NEAREST || scaleS > BROADEST * width) return undefined;
  const h = bell.height;
  const coefficients = new Float64Array(TERMS);
  const covarianceOfTerms = new Float64Array(TERMS * TERMS);
  const terms = [0, 1, 2, 3, STEP, CRYSTAL];
  terms.forEach((a, i) => {
    coefficients[i] = h * q[a];
    terms.forEach((b, j) => {
      covarianceOfTerms[i * TERMS + j] = h * h * c(a, b);
    });
  });
  return {
    baseline: {
      peakS: bell.peakS,
      widthS: width,
      coefficients,
      covariance: covarianceOfTerms,
      side: { middleS, scaleS, overshoot: q[OVERSHOOT] ?? 0 },
    },
    glass: stepOf(middleS, scaleS, -height * h, width * Math.sqrt(c(MIDDLE, MIDDLE)), height ** 2 / c(STEP, STEP)),
    areaError: h * width * Math.exp(q[AREA]) * Math.hypot(SHAPE_AREA_PART, Math.sqrt(c(AREA, AREA))),
  };
}

interface WholeModel {
  start: Float64Array;
  fit: (p: number) => LeastSquares;
  /** residuals and Jacobian without a step, and u of the rows */
  fill: (q: Float64Array, p: number, residuals: Float64Array, jacobian: Float64Array) => void;
  u: Float64Array;
}

/** Residuals in units of the event's height, areas in height × width. */
function wholeModel(rows: EventWindow, bell: Bell, width: number): WholeModel {
  const n = rows.t.length;
  const clock = eventClock(rows, bell.peakS, undefined);
  const u = rows.t.map((t) => (t - bell.peakS) / width);
  const y = rows.y.map((v) => v / bell.height);
  const rate = clock.slope.map((s) => s * width);
  const pull = Math.hypot(SHAPE_ERROR, rows.noise / bell.height) / TAIL_SPREAD;
  const fill: WholeModel['fill'] = (q, p, residuals, jacobian) => {
    const b = Math.exp(q[STEEPNESS]);
    const area = Math.exp(q[AREA]);
    const m = tailOfTurn(q[TURN]);
    const turned = tailByTurn(q[TURN]);
    for (let i = 0; i < n; i++) {
      const v = b * (clock.X[i] - q[PEAK]);
      fillShape(v, m);
      const phi = area * b * rate[i] * shapeAt.value;
      const crystal = q[CRYSTAL] * shapeAt.value;
      const row = i * p;
      let power = 1;
      let value = phi + q[CRYSTAL] * shapeAt.conversion - y[i];
      for (let k = 0; k < 4; k++) {
        jacobian[row + k] = power;
        value += q[k] * power;
        power *= u[i];
      }
      jacobian[row + CRYSTAL] = shapeAt.conversion;
      jacobian[row + AREA] = phi;
      jacobian[row + PEAK] = -b * (phi * shapeAt.byV + crystal);
      jacobian[row + STEEPNESS] = phi * (1 + v * shapeAt.byV) + v * crystal;
      jacobian[row + TURN] = (phi * shapeAt.byTail + q[CRYSTAL] * shapeAt.conversionByTail) * turned;
      if (p > PLAIN) {
        const spread = Math.exp(q[SPREAD]);
        const z = (u[i] - q[MIDDLE]) / spread;
        const l = 1 / (1 + Math.exp(-z));
        const o = 1 / (1 + Math.exp(1 - z));
        const bump = 4 * o * (1 - o);
        const overshoot = p > WITH_STEP ? q[OVERSHOOT] : 0;
        const steep = q[STEP] * (l * (1 - l) + overshoot * bump * (1 - 2 * o));
        const share = l + overshoot * bump;
        value += q[STEP] * share;
        jacobian[row + STEP] = share;
        jacobian[row + MIDDLE] = -steep / spread;
        jacobian[row + SPREAD] = -steep * z;
        if (p > WITH_STEP) jacobian[row + OVERSHOOT] = q[STEP] * bump;
      }
      residuals[i] = value;
    }
    residuals[n] = pull * m;
    jacobian.fill(0, n * p, (n + 1) * p);
    jacobian[n * p + TURN] = pull * turned;
  };
  const at = Math.min(n - 1, lowerBound(rows.t, bell.peakS));
  const steepness = WIDTH_IN_V / rate[at];
  const start = new Float64Array(WITH_STEP);
  start[0] = y[0];
  start[AREA] = Math.log(1 / (TOP_OF_JMAK * WIDTH_IN_V));
  start[STEEPNESS] = Math.log(steepness);
  start[TURN] = JMAK_TURN;
  const fit = (p: number) => new LeastSquares(n + 1, p, (q, residuals, jacobian) => fill(q, p, residuals, jacobian));
  return { start, fit, fill, u };
}

/** The step whose column lowers the sum of squares most beside what the fit without it can still move (score test). */
function bestStart(
  { fill, u }: WholeModel,
  without: Float64Array,
  n: number,
  left: number,
): { parameters: Float64Array; gain: number } | undefined {
  const p = PLAIN;
  const residuals = new Float64Array(n + 1);
  const jacobian = new Float64Array((n + 1) * p);
  fill(without, p, residuals, jacobian);
  const normal = new Float64Array(p * p);
  for (let i = 0; i <= n; i++)
    for (let a = 0; a < p; a++)
      for (let b = 0; b < p; b++) normal[a * p + b] += jacobian[i * p + a] * jacobian[i * p + b];
  if (!solveSymmetric(normal, new Float64Array(p), p)) return undefined;
  let best: { parameters: Float64Array; gain: number } | undefined;
  const cross = new Float64Array(p);
  for (let middle = MIDDLES.from * left; middle < MIDDLES.to * left; middle += MIDDLES.step) {
    if (middle < u[0]) continue;
    for (const spread of SPREADS) {
      cross.fill(0);
      let size = 0;
      let along = 0;
      for (let i = 0; i < n; i++) {
        const l = 1 / (1 + Math.exp((middle - u[i]) / spread));
        size += l * l;
        along -= l * residuals[i];
        for (let a = 0; a < p; a++) cross[a] += l * jacobian[i * p + a];
      }
      for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) size -= cross[a] * normal[a * p + b] * cross[b];
      const step = along / size;
      const gain = along * step;
      if (!(step < 0 && size > 1e-6) || (best && gain <= best.gain)) continue;
      const parameters = new Float64Array(WITH_STEP);
      parameters.set(without);
      parameters[STEP] = step;
      parameters[MIDDLE] = middle;
      parameters[SPREAD] = Math.log(spread);
      best = { parameters, gain };
    }
  }
  return best;
}

/** Bins [from, to) averaged to at most MOST_ROWS rows. */
function coarser(w: EventWindow, from: number, to: number): EventWindow {
  const size = Math.max(1, Math.ceil((to - from) / MOST_ROWS));
  const n = Math.max(0, Math.floor((to - from) / size));
  const mean = (column: Float64Array) =>
    Float64Array.from({ length: n }, (_, r) => {
      let sum = 0;
      for (let i = from + r * size; i < from + (r + 1) * size; i++) sum += column[i];
      return sum / size;
    });
  return {
    t: mean(w.t),
    T: mean(w.T),
    y: mean(w.y),
    noise: w.noise / Math.sqrt(size),
    flicker: w.flicker,
    binSize: w.binSize * size,
    undoneS: w.undoneS,
  };
}
