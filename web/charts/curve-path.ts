import type { PlotScale } from './plot-scale.ts';

const text = (px: number): string => px.toFixed(1);

/**
 * Path of a curve, thinned to what a screen can show: of the points that follow each other within one px of x, the first, the
 * extremes and the last are kept in their order, so that no peak is lost. Points that are not finite break the line.
 */
export function linePath(xs: readonly number[], ys: readonly number[], x: PlotScale, y: PlotScale): string {
  let path = '';
  let isOpen = false;
  const put = (i: number): void => {
    path += `${isOpen ? 'L' : 'M'}${text(x.at(xs[i]))} ${text(y.at(ys[i]))}`;
    isOpen = true;
  };
  const putRun = (from: number, to: number): void => {
    let low = from;
    let high = from;
    for (let i = from + 1; i <= to; i++) {
      if (ys[i] < ys[low]) low = i;
      if (ys[i] > ys[high]) high = i;
    }
    for (const i of new Set([from, Math.min(low, high), Math.max(low, high), to])) put(i);
  };
  let from = 0;
  for (let i = 0; i <= xs.length; i++) {
    const isGap = i === xs.length || !Number.isFinite(xs[i]) || !Number.isFinite(ys[i]);
    if (!isGap && Math.abs(x.at(xs[i]) - x.at(xs[from])) < 1) continue;
    if (from < i) putRun(from, i - 1);
    from = isGap ? i + 1 : i;
    if (isGap) isOpen = false;
  }
  return path;
}

/** Closed path of the band between `lower` and `upper`. */
export function bandPath(
  xs: readonly number[],
  lower: readonly number[],
  upper: readonly number[],
  x: PlotScale,
  y: PlotScale,
): string {
  const point = (i: number, edge: readonly number[]): string => `${text(x.at(xs[i]))} ${text(y.at(edge[i]))}`;
  const there = xs.map((_, i) => point(i, upper));
  const back = xs.map((_, i) => point(i, lower)).reverse();
  return xs.length === 0 ? '' : `M${[...there, ...back].join('L')}Z`;
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
