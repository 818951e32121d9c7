import { LeastSquares } from '../numeric/least-squares.ts';
import { interpolate } from '../numeric/local-polynomial.ts';
import {
  type EventClock,
  eventClock,
  eventValues,
  fillShape,
  JMAK_TURN,
  shapeAt,
  TOP_OF_JMAK,
  tailByTurn,
  tailOfTurn,
  WIDTH_IN_V,
} from './event-model.ts';
import { type Bell, type Excess, halfWidths } from './excess.ts';
import type { EventWindow } from './window.ts';

/** Tails are free to m = 0 ± this … */
const TAIL_SPREAD = 0.3;
/** … but those of several are first held at JMAK by this weight, so that a shoulder does not take any shape it likes. */
const HELD = 1;
/** A fitted shape is not trusted below this part of the height, however quiet the signal. */
const SHAPE_ERROR = 0.003;
/** … nor below this one when shapes are compared. */
const LEAST_SHAPE_ERROR = 0.001;
/** What a shape misses is alike in so many neighbouring rows: they count as one. */
const SAME = 10;
const PER_PEAK = 4;
/** Bins used in the fit: more only costs time. */
const MOST_ROWS = { one: 120, several: 400 };

export interface Separation {
  /** fitted heat flow of each peak on the bins of the window, signal units, in order of time */
  values: Float64Array[];
  bells: Bell[];
  /** By how much other shapes that the data bear move each area, parts of it */
  open: number[];
  /** root mean square residual, signal units */
  residual: number;
}

/**
 * Overlapping events by a sum of bounded asymmetric peaks (Perejón et al. 2011, J. Phys. Chem. B 115:1780, here with the shapes of
 * event-model.ts, of which JMAK events are members). Areas and steepnesses stay positive as logarithms.
 * @param start rough bells in order of time   @param startS of the hold, missing on a ramp
 */
export function separatePeaks(
  w: EventWindow,
  x: Excess,
  start: Bell[],
  startS: number | undefined,
): Separation | undefined {
  const fit = fitPeaks(w, x, start, startS);
  if (!fit) return undefined;
  const { q, open, clock, scaleY, residual } = fit;
  const values: Float64Array[] = [];
  const bells: Bell[] = [];
  for (const [k, b] of start.entries()) {
    const at = k * PER_PEAK;
    const own = eventValues(clock, {
      area: scaleY * Math.exp(q[at]),
      peak: q[at + 1],
      steepness: Math.exp(q[at + 2]),
      tail: tailOfTurn(q[at + 3]),
    });
    const bell = halfWidths(w, { ...x, from: 0, to: w.t.length, e: own }, b.leftS + b.rightS);
    if (!bell) return undefined;
    values.push(own);
    bells.push(bell);
  }
  return { values, bells, open, residual };
}

/** Root mean square by which one peak misses an excess, signal units. @param startS of the hold, missing on a ramp */
export const misfitOfOne = (w: EventWindow, x: Excess, bell: Bell, startS: number | undefined): number | undefined =>
  fitPeaks(w, x, [bell], startS)?.residual;

interface PeakFit {
  /** ln area, peak, ln steepness and turn of each peak */
  q: Float64Array;
  /** By how much other shapes that the data bear move each area, parts of it */
  open: number[];
  clock: EventClock;
  scaleY: number;
  residual: number;
}

/**
 * Shapes of several overlapping peaks, fewest parameters first. Areas and free shapes of peaks one width apart exchange: two shapes of their own
 * are 30 % off in the areas where they miss the curve by 3e-4 of its height. So the peaks share what the data do not ask them to differ in.
 * `tail` and `steepness`: 1 held (tails at JMAK, or both alike), 0 free.
 */
const SHAPES = [
  { held: 1, tails: 0, steepnesses: 0, parameters: (k: number) => 3 * k },
  { held: 0, tails: 1, steepnesses: 1, parameters: (k: number) => 2 * k + 2 },
  { held: 0, tails: 1, steepnesses: 0, parameters: (k: number) => 3 * k + 1 },
  { held: 0, tails: 0, steepnesses: 0, parameters: (k: number) => 4 * k },
];
const JMAK = 0;
/** More peaks than this are humps of a baseline rather than events: JMAK and free shapes are enough there, and each costs its time. */
const MOST_COMPARED = 3;
/** Where events are not JMAK, the family is near their shapes at best: this part of what leaving JMAK moves an area by stays open. */
const MOVED_AREAS = 0.3;
/** Weight by which what is held or shared is. */
const TIED = 3;

function fitPeaks(w: EventWindow, x: Excess, start: Bell[], startS: number | undefined): PeakFit | undefined {
  const count = start.length;
  const stride = Math.max(1, Math.ceil((x.to - x.from) / (count > 1 ? MOST_ROWS.several : MOST_ROWS.one)));
  const rows = Math.ceil((x.to - x.from) / stride);
  const p = PER_PEAK * count;
  if (rows <= p) return undefined;
  const highest = start.reduce((a, b) => (b.height > a.height ? b : a));
  const scaleY = highest.height;
  const clock = eventClock(w, highest.peakS, startS);
  const parameters = startOf(w, clock, start, scaleY);
  const error = Math.max(SHAPE_ERROR, w.noise / scaleY);
  let pull = error / TAIL_SPREAD;
  let tie = { tails: 0, steepnesses: 0 };
  const ties = rows + count;
  const fit = new LeastSquares(rows + 3 * count, p, (q, residuals, jacobian) => {
    for (let r = 0; r < rows; r++) residuals[r] = -x.e[x.from + r * stride] / scaleY;
    jacobian.fill(0, rows * p);
    for (let k = 0; k < count; k++) {
      const at = k * PER_PEAK;
      const [b, peak, m] = [Math.exp(q[at + 2]), q[at + 1], tailOfTurn(q[at + 3])];
      const turned = tailByTurn(q[at + 3]);
      const size = Math.exp(q[at]) * b;
      for (let r = 0, row = at; r < rows; r++, row += p) {
        const i = x.from + r * stride;
        const v = b * (clock.X[i] - peak);
        fillShape(v, m);
        const y = size * clock.slope[i] * shapeAt.value;
        residuals[r] += y;
        jacobian[row] = y;
        jacobian[row + 1] = -y * b * shapeAt.byV;
        jacobian[row + 2] = y * (1 + v * shapeAt.byV);
        jacobian[row + 3] = y * shapeAt.byTail * turned;
      }
      residuals[rows + k] = pull * m;
      jacobian[(rows + k) * p + at + 3] = pull * turned;
      // Each peak's steepness and tail beside those of the first.
      residuals[ties + 2 * k] = tie.steepnesses * (q[at + 2] - q[2]);
      residuals[ties + 2 * k + 1] = tie.tails * (m - tailOfTurn(q[3]));
      if (k === 0) continue;
      jacobian[(ties + 2 * k) * p + at + 2] = tie.steepnesses;
      jacobian[(ties + 2 * k) * p + 2] = -tie.steepnesses;
      jacobian[(ties + 2 * k + 1) * p + at + 3] = tie.tails * turned;
      jacobian[(ties + 2 * k + 1) * p + 3] = -tie.tails * tailByTurn(q[3]);
    }
  });
  const scale = scaleOf(parameters, count);
  if (count === 1) {
    const { parameters: q, sumOfSquares } = fit.minimise(parameters, scale, 60, 1e-3);
    if (!q.every(Number.isFinite)) return undefined;
    return { q, open: [0], clock, scaleY, residual: scaleY * Math.sqrt(sumOfSquares / rows) };
  }
  const variance = (w.noise / scaleY) ** 2 + LEAST_SHAPE_ERROR ** 2;
  const shapes = count > MOST_COMPARED ? [SHAPES[JMAK], SHAPES[SHAPES.length - 1]] : SHAPES;
  let near = parameters;
  const fits = shapes.map(({ held, tails, steepnesses, parameters: used }) => {
    pull = held ? HELD : error / TAIL_SPREAD;
    tie = { tails: TIED * tails, steepnesses: TIED * steepnesses };
    const { parameters: q, sumOfSquares } = fit.minimise(steepnesses ? parameters : near, scale, 60, 1e-5);
    // Each begins where the one before ended; shared steepnesses, another valley, at the rough bells.
    if (!steepnesses) near = q;
    return { q, sumOfSquares, score: sumOfSquares / variance / SAME + used(count) * Math.log(rows / SAME) };
  });
  if (!fits.every(({ q, score }) => q.every(Number.isFinite) && Number.isFinite(score))) return undefined;
  const best = fits.reduce((a, b) => (b.score < a.score ? b : a));
  const open = start.map((_, k) => {
    let total = 0;
    let squares = 0;
    for (const { q, score } of fits) {
      const weight = Math.exp(-(score - best.score) / 2);
      total += weight;
      squares += weight * Math.expm1(q[k * PER_PEAK] - best.q[k * PER_PEAK]) ** 2;
    }
    const moved = Math.min(1, Math.abs(Math.expm1(fits[JMAK].q[k * PER_PEAK] - best.q[k * PER_PEAK])));
    return Math.hypot(Math.sqrt(squares / total), MOVED_AREAS * moved);
  });
  return { q: best.q, open, clock, scaleY, residual: scaleY * Math.sqrt(best.sumOfSquares / rows) };
}

/** ln(area/height), peak and ln steepness in X, tail of each rough bell. */
function startOf(w: EventWindow, clock: EventClock, bells: Bell[], scaleY: number): Float64Array {
  const out = new Float64Array(PER_PEAK * bells.length);
  bells.forEach((b, k) => {
    const peak = interpolate(w.t, clock.X, b.peakS);
    const slope = interpolate(w.t, clock.slope, b.peakS);
    const steepness = WIDTH_IN_V / ((b.leftS + b.rightS) * slope);
    const area = b.height / scaleY / (TOP_OF_JMAK * steepness * slope);
    out.set([Math.log(area), peak, Math.log(steepness), JMAK_TURN], k * PER_PEAK);
  });
  return out;
}

/** What counts as a change: a peak's is measured in its own width. */
function scaleOf(parameters: Float64Array, count: number): Float64Array {
  const scale = new Float64Array(parameters.length).fill(1);
  for (let k = 0; k < count; k++) scale[k * PER_PEAK + 1] = 1 / Math.exp(parameters[k * PER_PEAK + 2]);
  return scale;
}

/**
 * The measured excess divided among the peaks in proportion to their fitted heights at each time: what the fitted shapes miss stays with
 * the event it lies under.
 */
export function partExcess(w: EventWindow, x: Excess, { values, bells, open }: Separation): Excess[] {
  return values.map((own, k) => {
    const share = new Float64Array(w.t.length);
    const e = new Float64Array(w.t.length);
    const cumulative = new Float64Array(w.t.length);
    for (let i = x.from; i < x.to; i++) {
      let total = 0;
      for (const peak of values) total += peak[i];
      // Outside every fitted peak the nearest one takes the rest.
      const nearest = w.t[i] < bells[k].peakS ? k === 0 : k === values.length - 1;
      share[i] = total > 1e-6 * bells[k].height ? own[i] / total : nearest ? 1 : 0;
      e[i] = share[i] * x.e[i];
    }
    let sum = k === 0 ? x.cumulative[x.from] : 0;
    cumulative[x.from] = sum;
    for (let i = x.from + 1; i < x.to; i++) {
      sum += 0.5 * (e[i] + e[i - 1]) * (w.t[i] - w.t[i - 1]);
      cumulative[i] = sum;
    }
    cumulative.fill(sum, x.to);
    return { ...x, e, cumulative, area: sum, share, openPart: open[k] };
  });
}
