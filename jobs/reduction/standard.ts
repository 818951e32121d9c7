import type { Segment, StandardMelting } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import { fitLine } from '../numeric/line.ts';
import { interpolate, lowerBound } from '../numeric/local-polynomial.ts';
import { binAt } from './conversion.ts';
import type { Excess } from './excess.ts';
import { type Excursion, findExcursions, noiseSigma } from './find-event.ts';
import { isolateEvents } from './isolate.ts';
import { slopeOf } from './segments.ts';
import { averageWindow, type EventWindow } from './window.ts';

/** Surroundings of the peak that are looked at, full widths. */
const SURROUNDINGS = { before: 8, behind: 12 };
/** The tangent is a line over this part of the rise, slid over it from the height FROM on. */
const TANGENT = { part: 0.25, from: 0.15 };
const FEWEST_BINS = 4;
/** The exponential tail is read between these parts of the height. */
const TAIL = { high: 0.35, low: 0.04 };

/**
 * Melting of a pure metal on one heating segment, uncorrected: extrapolated onset (tangent at the steepest point of the leading edge
 * against the baseline before the peak, ISO 11357-1), area, tail.
 * @param y heat flow as read, in `scan.heatFlowUnit` (V already divided by the sensitivity)   @param exothermUp undefined: the larger excursion is the melting
 * @returns undefined where no peak stands out or it is cut
 */
export function reduceStandard(
  scan: ReadScan,
  y: Float64Array,
  segment: Segment,
  exothermUp: boolean | undefined,
): StandardMelting | undefined {
  const { timeS, temperatureK } = scan;
  const flipped = y.map((v) => -v);
  const strongest = (signal: Float64Array) => findExcursions(timeS, signal, segment.from, segment.to)[0];
  const up = exothermUp === true ? undefined : strongest(y);
  const down = exothermUp === false ? undefined : strongest(flipped);
  const found: Excursion | undefined = !up ? down : !down ? up : up.prominence > down.prominence ? up : down;
  if (!found) return undefined;
  const heat = found === up ? y : flipped;
  const width = found.leftS + found.rightS;
  const from = Math.max(segment.from, lowerBound(timeS, found.peakS - SURROUNDINGS.before * width));
  const to = Math.min(segment.to, lowerBound(timeS, found.peakS + SURROUNDINGS.behind * width));
  const w = averageWindow(timeS, temperatureK, heat, from, to, width, noiseSigma(heat, from, to));
  const room = { fromS: timeS[segment.from], toS: timeS[segment.to - 1], responseS: 0, footless: true };
  const isolated = isolateEvents(w, [{ ...found, height: found.prominence }], room);
  if ('cut' in isolated) return undefined;
  const { excess: x, refit } = isolated;
  const [bell] = isolated.bells;
  const edge = steepestEdge(w, x, bell.height);
  if (!edge) return undefined;
  const a = Math.max(segment.from, lowerBound(timeS, edge.onsetS - 2 * width));
  const b = Math.min(segment.to, lowerBound(timeS, edge.onsetS + 2 * width));
  const rate = slopeOf(timeS, temperatureK, a, b);
  const moved = [refit(-0.2 * width, 0), refit(0, 0.2 * width)].map((m) => m.area - x.area);
  return {
    rateKPerS: rate,
    onsetK: interpolate(w.t, w.T, edge.onsetS),
    onsetErrorK: edge.errorS * rate,
    peakK: interpolate(w.t, w.T, bell.peakS),
    area: x.area,
    areaError: Math.hypot(...moved, w.noise * Math.sqrt(x.to - x.from) * (w.t[1] - w.t[0])),
    ...(scan.heatFlowUnit !== 'W/kg' && { resistanceKPerW: rate / edge.slope }),
    ...tailOf(w, x, bell.height),
  };
}

/** Line of the greatest slope over the rise, and where it meets the baseline. */
function steepestEdge(
  w: EventWindow,
  x: Excess,
  height: number,
): { onsetS: number; errorS: number; slope: number } | undefined {
  let top = x.from;
  for (let i = x.from; i < x.to; i++) if (x.e[i] > x.e[top]) top = i;
  let first = top;
  while (first > x.from && x.e[first - 1] > TANGENT.from * height) first--;
  const length = Math.max(FEWEST_BINS, Math.round(TANGENT.part * (top - first)));
  let best: { onsetS: number; errorS: number; slope: number } | undefined;
  for (let i = Math.max(x.from, Math.min(first, top - length + 1)); i + length <= top + 1; i++) {
    const line = fitLine(w.t.subarray(i, i + length), x.e.subarray(i, i + length));
    if (best && line.slope <= best.slope) continue;
    const onsetS = -line.intercept / line.slope;
    // Error of the crossing from noise: a line's height error at distance d from its middle.
    const middle = (w.t[i] + w.t[i + length - 1]) / 2;
    const spread = ((w.t[i + length - 1] - w.t[i]) ** 2 * (length + 1)) / (12 * Math.max(1, length - 1));
    const errorS =
      ((w.noise / line.slope) * Math.sqrt(1 + (onsetS - middle) ** 2 / Math.max(spread, 1e-300))) / Math.sqrt(length);
    best = { onsetS, errorS, slope: line.slope };
  }
  return best && best.slope > 0 ? best : undefined;
}

/** Time constant of the tail: ln of the excess against time, weighted by its square (the noise of a logarithm is 1/e). */
function tailOf(w: EventWindow, x: Excess, height: number): { tailS?: number; tailErrorS?: number } {
  let top = x.from;
  for (let i = x.from; i < x.to; i++) if (x.e[i] > x.e[top]) top = i;
  let from = top;
  while (from < x.to && x.e[from] > TAIL.high * height) from++;
  let to = from;
  const least = Math.max(TAIL.low * height, 3 * w.noise);
  while (to < x.to && x.e[to] > least) to++;
  if (to - from < FEWEST_BINS || binAt(w, x, w.t[from]) >= x.to - 1) return {};
  const e = x.e.subarray(from, to);
  const line = fitLine(
    w.t.subarray(from, to),
    e.map(Math.log),
    e.map((v) => v * v),
  );
  if (!(line.slope < 0)) return {};
  return { tailS: -1 / line.slope, tailErrorS: line.slopeError / line.slope ** 2 };
}
