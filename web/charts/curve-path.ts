import type { PlotScale } from './plot-scale.ts';

/** A drawn line passes every measured point within this distance, measured upright, px: well within its own width. */
const TOLERANCE_PX = 0.45;

/** A px in tenths, as a whole number: a relative path adds up whole numbers, so that rounding does not. */
const tenths = (px: number): number => Math.round(px * 10);

/** Tenths of a px as short text: `.3`, `-12`, `4.5`. */
function text(count: number): string {
  const size = Math.abs(count);
  const whole = Math.floor(size / 10);
  const digits = size % 10 === 0 ? String(whole) : `${whole === 0 ? '' : whole}.${size % 10}`;
  return count < 0 ? `-${digits}` : digits;
}

/** Writes points as one path: absolute where a line begins, from there on relative. */
class PathWriter {
  path = '';
  #x = 0;
  #y = 0;
  #isOpen = false;

  put(px: number, py: number): void {
    const [x, y] = [tenths(px), tenths(py)];
    if (!this.#isOpen) this.path += `M${text(x)} ${text(y)}`;
    else if (x !== this.#x || y !== this.#y) {
      const dy = text(y - this.#y);
      this.path += `l${text(x - this.#x)}${dy.startsWith('-') ? '' : ' '}${dy}`;
    }
    this.#isOpen = true;
    this.#x = x;
    this.#y = y;
  }

  lift(): void {
    this.#isOpen = false;
  }
}

/**
 * Leaves out points that lie within TOLERANCE_PX of the line between the kept ones: from a kept point on, the slopes that pass all
 * points so far within the tolerance narrow with each point; where none is left, the last point that could be reached is kept. One
 * pass, whatever the count of points. A line that turns back in x is kept at the turn.
 */
class Simplifier {
  #fromX = 0;
  #fromY = 0;
  #lastX = 0;
  #lastY = 0;
  #steepest = Number.POSITIVE_INFINITY;
  #flattest = Number.NEGATIVE_INFINITY;
  #direction = 0;
  #count = 0;
  readonly #keep: (px: number, py: number) => void;

  constructor(keep: (px: number, py: number) => void) {
    this.#keep = keep;
  }

  add(px: number, py: number): void {
    if (this.#count++ === 0) {
      this.#start(px, py);
      return;
    }
    if (!this.#isReached(px, py)) this.#start(this.#lastX, this.#lastY);
    // Straight up or down there is no slope: both ends are kept.
    if (px === this.#fromX) this.#start(px, py);
    else this.#narrow(px, py);
    this.#lastX = px;
    this.#lastY = py;
  }

  end(): void {
    if (this.#count > 1) this.#keep(this.#lastX, this.#lastY);
    this.#count = 0;
  }

  #start(px: number, py: number): void {
    this.#keep(px, py);
    this.#fromX = this.#lastX = px;
    this.#fromY = this.#lastY = py;
    this.#steepest = Number.POSITIVE_INFINITY;
    this.#flattest = Number.NEGATIVE_INFINITY;
    this.#direction = 0;
  }

  #isReached(px: number, py: number): boolean {
    const dx = px - this.#fromX;
    if (dx === 0 || (this.#direction !== 0 && (px - this.#lastX) * this.#direction <= 0)) return false;
    const slope = (py - this.#fromY) / Math.abs(dx);
    return slope <= this.#steepest && slope >= this.#flattest;
  }

  #narrow(px: number, py: number): void {
    const dx = px - this.#fromX;
    const reach = Math.abs(dx);
    this.#direction = Math.sign(dx);
    this.#steepest = Math.min(this.#steepest, (py - this.#fromY + TOLERANCE_PX) / reach);
    this.#flattest = Math.max(this.#flattest, (py - this.#fromY - TOLERANCE_PX) / reach);
  }
}

/**
 * Path of a curve, thinned to what a screen can show: of the points that follow each other within one px of x, the first, the
 * extremes and the last are looked at in their order, so that no peak is lost, and of these the ones that a line cannot stand for are
 * drawn. Points that are not finite break the line.
 */
export function linePath(xs: readonly number[], ys: readonly number[], x: PlotScale, y: PlotScale): string {
  const writer = new PathWriter();
  const line = new Simplifier((px, py) => writer.put(px, py));
  const pxs = xs.map((value) => x.at(value));
  const put = (i: number): void => line.add(pxs[i], y.at(ys[i]));
  const putRun = (from: number, to: number): void => {
    let low = from;
    let high = from;
    for (let i = from + 1; i <= to; i++) {
      if (ys[i] < ys[low]) low = i;
      if (ys[i] > ys[high]) high = i;
    }
    const [first, second] = low < high ? [low, high] : [high, low];
    put(from);
    if (first !== from) put(first);
    if (second !== first && second !== from) put(second);
    if (to !== second && to !== from) put(to);
  };
  let from = 0;
  for (let i = 0; i <= xs.length; i++) {
    const isGap = i === xs.length || !Number.isFinite(pxs[i]) || !Number.isFinite(ys[i]);
    if (!isGap && Math.abs(pxs[i] - pxs[from]) < 1) continue;
    if (from < i) putRun(from, i - 1);
    from = isGap ? i + 1 : i;
    if (isGap) {
      line.end();
      writer.lift();
    }
  }
  return writer.path;
}

/** Closed path of the band between `lower` and `upper`. */
export function bandPath(
  xs: readonly number[],
  lower: readonly number[],
  upper: readonly number[],
  x: PlotScale,
  y: PlotScale,
): string {
  if (xs.length === 0) return '';
  const writer = new PathWriter();
  const line = new Simplifier((px, py) => writer.put(px, py));
  for (let i = 0; i < xs.length; i++) line.add(x.at(xs[i]), y.at(upper[i]));
  for (let i = xs.length - 1; i >= 0; i--) line.add(x.at(xs[i]), y.at(lower[i]));
  line.end();
  return `${writer.path}Z`;
}

/** Place of the point nearest to a px, and its distance in px; -1 for an empty curve. */
export function nearestPoint(
  xs: readonly number[],
  ys: readonly number[],
  x: PlotScale,
  y: PlotScale,
  px: number,
  py: number,
): { index: number; distance: number } {
  let index = -1;
  let distance = Number.POSITIVE_INFINITY;
  for (let i = 0; i < xs.length; i++) {
    const d = Math.hypot(x.at(xs[i]) - px, y.at(ys[i]) - py);
    if (d < distance) {
      index = i;
      distance = d;
    }
  }
  return { index, distance };
}
