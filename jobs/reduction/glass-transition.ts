import { lowerBound } from '../numeric/local-polynomial.ts';
import type { LocalStep } from './local-steps.ts';
import type { Foot } from './shape.ts';
import { footAt } from './shape.ts';

/** A step of the heat capacity as it shows on a scan: endothermic, times in s. */
export interface GlassTransition {
  /** half-height midpoint and extrapolated onset (ISO 11357-2), s */
  midpointS: number;
  onsetS: number;
  midpointErrorS: number;
  /** scale of the logistic step, s */
  scaleS: number;
  /** where the step begins and where the signal is the liquid's again */
  fromS: number;
  toS: number;
  /** signal units, negative (exotherm up) */
  step: number;
  /** squared ratio of the step to its error */
  significance: number;
}

/** Bins of the coarse trace. */
const BINS = 120;
/** Places tried for a broad step. */
const GRID = 14;
/** A step must stand this many errors out of noise, and this part of the event's height. */
const LEAST_SIGMAS = 7;
const LEAST_HEIGHT_PART = 0.01;
/** Drop of the sum of squares, in variances, for each further term of the baseline that counts as needed. */
const NEEDED = 6;
/** The transition is looked for up to this many half widths before the event that follows. */
export const GLASS_BEFORE = 1.3;
/** Left half width of an event on a ramp ÷ the right one, at most (JMAK: 1.48): a step before it makes the rough one too large. */
export const MOST_LEFT = 1.6;
/** Lines beside a step that a jump is told by, widths of it and rows at least; the most rows a jump is looked for in. */
const LINES = 6.7;
const FEWEST_BESIDE = 8;
const MOST_OF_JUMP = 400;
/** A step describes the rows better than a jump does when it leaves less by this many variances. */
const UNRESOLVED = 9;
/** A logistic step is over this many of its widths from its middle; an aged glass overshoots behind it. */
const BEFORE_WIDTHS = 4;
const BEHIND_WIDTHS = 6;

/** Parts of the rows left out at the start, one after the other: a furnace settles there, which looks like a step or bends the baseline. */
const START_PARTS = [0.08, 0.2, 0.4];
/** A step that begins before this part of the rows may be the start of the ramp, and gives way to a clear one behind it. */
const NEAR_START = 0.1;

/** A smooth baseline describes the rows while it leaves less than this many times their noise, or this part of the foot's height. */
const ROUGH = { noise: 1.6, foot: 0.005 };

/** What one smooth baseline with a step makes of a ramp. */
export interface StepOnRamp {
  glass?: GlassTransition;
  /** No such baseline describes the rows: what was found, or not, says little */
  rough: boolean;
}

/** The glass transition in rows [from, to), by `findOnRamp`. */
export const findGlassTransition = (...rows: Parameters<typeof findOnRamp>): GlassTransition | undefined =>
  findOnRamp(...rows).glass;

/**
 * A step of rows [from, to) on one smooth baseline. Where the clearest step lies at the start, or smears over much of the rows because of it,
 * it is looked for without the start as well.
 */
export function findOnRamp(
  t: Float64Array,
  y: Float64Array,
  from: number,
  to: number,
  noise: number,
  foot?: Foot,
): StepOnRamp {
  const first = findStep(t, y, from, to, noise, foot);
  // Where all rows show no step, or one well inside, there is no more to look for.
  if (!first.glass || first.glass.fromS > t[from] + NEAR_START * (t[to - 1] - t[from])) return first;
  let best: StepOnRamp | undefined;
  for (const part of START_PARTS) {
    const start = from + Math.round(part * (to - from));
    const found = findStep(t, y, start, to, noise, foot);
    const { glass } = found;
    if (glass && glass.fromS > t[start] && glass.significance > (best?.glass?.significance ?? 0)) best = found;
  }
  return best ?? first;
}

/**
 * Looks for one endothermic step in rows [from, to) by least squares: quadratic baseline + step × logistic((t − midpoint)/width), the
 * foot of the event behind it with free height. Midpoint and width are searched, the rest is linear.
 * @param y heat flow, exotherm up   @param noise of one row   @param foot of the event that follows, if one does
 * @returns no step where a smooth drift explains the rows as well
 */
function findStep(t: Float64Array, y: Float64Array, from: number, to: number, noise: number, foot?: Foot): StepOnRamp {
  const size = Math.max(1, Math.ceil((to - from) / BINS));
  const n = Math.floor((to - from) / size);
  if (n < 16) return { rough: false };
  const { time, r } = binned(t, y, from, size, n);
  const [start, span] = [time[0], time[n - 1] - time[0]];
  const step = span / (n - 1);
  const base: Float64Array[] = [0, 1, 2].map((k) => time.map((s) => ((2 * (s - start)) / span - 1) ** k));
  if (foot) base.push(time.map((s) => footAt({ ...foot, height: 1 }, s)));
  const q = orthonormal(base);
  for (const column of q) remove(r, column);
  // What else could look like a step: a drift of third or fourth order, a foot of another steepness. The step must stand without them.
  const rivals = [3, 4].map((k) => time.map((s) => ((2 * (s - start)) / span - 1) ** k));
  if (foot)
    for (const f of [0.8, 1.25]) rivals.push(time.map((s) => footAt({ ...foot, height: 1, leftS: f * foot.leftS }, s)));
  const wide = orthonormal(rivals, q);
  const left = Float64Array.from(r);
  for (const column of wide.slice(q.length)) remove(left, column);
  const logistic = new Float64Array(n);
  const tried = (middle: number, width: number, data = r, basis = q) => {
    if (width < step / 2 || width > span / 8 || middle < start || middle > start + span) return { gain: 0, height: 0 };
    for (let i = 0; i < n; i++) logistic[i] = 1 / (1 + Math.exp(-(time[i] - middle) / width));
    return gainOf(logistic, data, basis);
  };

  // Sharp steps by running sums, broad ones on a coarse grid; then the logistic around the best place.
  const variance = (gain: number) => Math.max(noise ** 2 / size, (dot(left, left) - gain) / n, 1e-30);
  const least = LEAST_SIGMAS ** 2;
  // Most scans show no step: no more work on what is not on its way to a detection.
  let best = sharpestStep(time, left, wide);
  const isRough = (gain: number) => {
    let allowed = (n * (ROUGH.noise * noise) ** 2) / size;
    if (foot) for (let i = 0; i < n; i++) allowed += (ROUGH.foot * foot.height * base[3][i]) ** 2;
    return dot(left, left) - gain > allowed;
  };
  if (best.gain < 0.3 * least * variance(best.gain)) return { rough: isRough(0) };
  for (let k = 1; k < GRID; k++) {
    for (const width of [span / 60, span / 20]) {
      const middle = start + (span * k) / GRID;
      const found = tried(middle, width, left, wide);
      if (found.height < 0 && found.gain > best.gain) best = { middle, width, ...found };
    }
  }
  best = refine(best, (m, w) => tried(m, w, left, wide));
  const { gain, height } = best;
  const plain = refine({ ...best, ...tried(best.middle, best.width) }, tried);
  // The rivals take part in placing the step only where the rows need them.
  const unexplained = dot(r, r) - plain.gain - (dot(left, left) - gain);
  if (unexplained < NEEDED * (wide.length - q.length) * variance(gain)) best = plain;
  const cut = best.middle - 2.5 * best.width < start || best.middle + 1.5 * best.width > start + span;
  if (cut || !(height < 0) || gain < least * variance(gain)) return { rough: isRough(0) };
  if (foot && -best.height < LEAST_HEIGHT_PART * foot.height) return { rough: isRough(0) };
  // d(step)/d(middle) has the norm² step²/(6 width) per unit of time.
  const error = Math.sqrt((variance(gain) * 6 * best.width * step) / best.height ** 2);
  const glass = stepOf(best.middle, best.width, best.height, error, gain / variance(gain));
  return { glass, rough: isRough(gain) };
}

/** A step seen in a window of rows, its middle and width fitted between parallel lines. */
export function refineStep(t: Float64Array, y: Float64Array, noise: number, seen: LocalStep): GlassTransition {
  const [from, to] = [lowerBound(t, seen.fromS), lowerBound(t, seen.toS)];
  const size = Math.max(1, Math.ceil((to - from) / BINS));
  const n = Math.floor((to - from) / size);
  const { time, r } = binned(t, y, from, size, n);
  const q = orthonormal([time.map(() => 1), time.map((s) => s - seen.middleS)]);
  for (const column of q) remove(r, column);
  const logistic = new Float64Array(n);
  const tried = (middle: number, width: number) => {
    if (width > 2 * seen.scaleS || Math.abs(middle - seen.middleS) > 2 * seen.scaleS) return { gain: 0, height: 0 };
    for (let i = 0; i < n; i++) logistic[i] = 1 / (1 + Math.exp((middle - time[i]) / width));
    return gainOf(logistic, r, q);
  };
  const { middleS: middle, scaleS: width } = seen;
  const best = refine({ middle, width, ...tried(middle, width) }, tried);
  const variance = Math.max(noise ** 2 / size, (dot(r, r) - best.gain) / n);
  const step = (time[n - 1] - time[0]) / (n - 1);
  const error = Math.sqrt((variance * 6 * best.width * step) / best.height ** 2);
  return stepOf(best.middle, best.width, best.height, error, best.gain / variance);
}

/**
 * Row at which the signal jumps, where a jump between two rows describes a step's surroundings as well as the step itself does.
 * @returns undefined for a true step: one that rows resolve
 */
export function jumpAt(
  t: Float64Array,
  y: Float64Array,
  [from, to]: readonly [number, number],
  noise: number,
  g: GlassTransition,
): { row: number; height: number } | undefined {
  const near = LINES * g.scaleS;
  const middle = lowerBound(t, g.midpointS);
  const a = Math.max(from, Math.min(lowerBound(t, g.midpointS - near), middle - FEWEST_BESIDE));
  const b = Math.min(to, Math.max(lowerBound(t, g.midpointS + near), middle + FEWEST_BESIDE));
  if (b - a > MOST_OF_JUMP || b - a < FEWEST_BESIDE) return undefined;
  const time = t.subarray(a, b);
  const r = y.slice(a, b);
  const q = orthonormal([time.map(() => 1), time.map((s) => s - g.midpointS)]);
  for (const column of q) remove(r, column);
  const smooth = gainOf(
    time.map((s) => 1 / (1 + Math.exp((g.midpointS - s) / g.scaleS))),
    r,
    q,
  );
  const sharp = sharpestStep(time, r, q);
  const variance = Math.max(noise ** 2, (dot(r, r) - Math.max(sharp.gain, smooth.gain)) / (b - a));
  if (sharp.gain < smooth.gain - UNRESOLVED * variance) return undefined;
  return { row: a + lowerBound(time, sharp.middle), height: sharp.height };
}

/** Means of time and signal over `n` bins of `size` rows. */
function binned(t: Float64Array, y: Float64Array, from: number, size: number, n: number) {
  const time = new Float64Array(n);
  const r = new Float64Array(n);
  for (let b = 0; b < n; b++) {
    for (let i = from + b * size; i < from + (b + 1) * size; i++) {
      time[b] += t[i] / size;
      r[b] += y[i] / size;
    }
  }
  return { time, r };
}

/** A logistic step as a glass transition; times in s, `significance` its squared ratio to the error. */
export function stepOf(
  middleS: number,
  scaleS: number,
  step: number,
  midpointErrorS: number,
  significance: number,
): GlassTransition {
  return {
    midpointS: middleS,
    // The tangent at the middle of a logistic rises from the line before two widths earlier.
    onsetS: middleS - 2 * scaleS,
    scaleS,
    midpointErrorS,
    fromS: middleS - BEFORE_WIDTHS * scaleS,
    toS: middleS + BEHIND_WIDTHS * scaleS,
    step,
    significance,
  };
}

interface Step {
  middle: number;
  width: number;
  gain: number;
  height: number;
}

/** Downward step between two bins that lowers the sum of squares most, from running sums over r and the basis q. */
function sharpestStep(time: Float64Array, r: Float64Array, q: Float64Array[]): Step {
  const n = time.length;
  const best: Step = { middle: 0, width: (time[n - 1] - time[0]) / (n - 1), gain: 0, height: 0 };
  const tail = q.map(() => 0);
  let rest = 0;
  for (let c = n - 1; c > 2; c--) {
    rest += r[c];
    let size = n - c;
    for (let k = 0; k < q.length; k++) {
      tail[k] += q[k][c];
      size -= tail[k] ** 2;
    }
    if (!(rest < 0 && size > 0.05 && rest ** 2 / size > best.gain)) continue;
    best.gain = rest ** 2 / size;
    best.height = rest / size;
    best.middle = (time[c] + time[c - 1]) / 2;
  }
  return best;
}

/** Pattern search over middle and logarithm of the width, halving where nothing near is better. */
function refine(from: Step, tried: (middle: number, width: number) => { gain: number; height: number }): Step {
  let best = from;
  let reach = 2 * from.width;
  let stretch = 2;
  for (let round = 0; round < 14; round++) {
    const { middle, width } = best;
    for (const [m, w] of [
      [middle - reach, width],
      [middle + reach, width],
      [middle, width / stretch],
      [middle, width * stretch],
    ]) {
      const found = tried(m, w);
      if (found.height < 0 && found.gain > best.gain) best = { middle: m, width: w, ...found };
    }
    if (best.middle === middle && best.width === width) {
      if (reach < width / 20) break;
      reach /= 2.5;
      stretch = Math.sqrt(stretch);
    }
  }
  return best;
}

/** Drop of the sum of squares, and the height, when `column` joins the basis. */
function gainOf(column: Float64Array, r: Float64Array, q: Float64Array[]): { gain: number; height: number } {
  let size = dot(column, column);
  for (const known of q) size -= dot(known, column) ** 2;
  if (!(size > 1e-3)) return { gain: 0, height: 0 };
  const along = dot(column, r);
  return { gain: along ** 2 / size, height: along / size };
}

/** Gram–Schmidt behind what is orthonormal already; columns that hang on earlier ones are left out. */
function orthonormal(columns: readonly Float64Array[], first: readonly Float64Array[] = []): Float64Array[] {
  const out = [...first];
  for (const column of columns) {
    const c = Float64Array.from(column);
    const before = Math.sqrt(dot(c, c));
    for (let pass = 0; pass < 2; pass++) for (const known of out) remove(c, known);
    const norm = Math.sqrt(dot(c, c));
    if (norm > 1e-7 * before) out.push(c.map((v) => v / norm));
  }
  return out;
}

function remove(from: Float64Array, unit: Float64Array): void {
  const along = dot(from, unit);
  for (let i = 0; i < from.length; i++) from[i] -= along * unit[i];
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum;
}
