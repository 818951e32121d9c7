import type { Segment, StandardMelting } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import { fitLine } from '../numeric/line.ts';
import { interpolate, lowerBound } from '../numeric/local-polynomial.ts';
import { baselineAt } from './baseline.ts';
import type { Bell, Excess } from './excess.ts';
import { type Excursion, findExcursions, noiseSigma } from './find-event.ts';
import { isolateEvents } from './isolate.ts';
import { fitLeadingEdge, type LeadingEdge } from './leading-edge.ts';
import { slopeOf } from './segments.ts';
import { averageWindow, type EventWindow } from './window.ts';

/** Surroundings of the peak that are looked at, full widths. */
const SURROUNDINGS = { before: 8, behind: 12 };
/**
 * The leading edge of a pure metal behind a thermal resistance only grows steeper up to the end of melting: its steepest part is the upper
 * one. One fixed stretch, in parts of the height, since picking the steepest of many favours noise.
 */
const TANGENT = { from: 0.45, to: 0.92 };
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
  // A rise of many tail lengths is usual here: the half widths as they are.
  const small = Math.min(found.leftS, found.rightS);
  const large = found.spanS - small;
  const [leftS, rightS] = found.leftS < found.rightS ? [small, large] : [large, small];
  const width = found.spanS;
  const noise = noiseSigma(heat, segment.from, segment.to);
  const from = Math.max(segment.from, lowerBound(timeS, found.peakS - SURROUNDINGS.before * width));
  const to = Math.min(segment.to, lowerBound(timeS, found.peakS + SURROUNDINGS.behind * width));
  const w = averageWindow(timeS, temperatureK, heat, from, to, width, noise);
  const room = { fromS: timeS[segment.from], toS: timeS[segment.to - 1], responseS: 0, footless: true };
  const isolated = isolateEvents(w, [{ peakS: found.peakS, leftS, rightS, height: found.prominence }], room);
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
    ...tailOf(timeS, heat, noise, x, bell),
  };
}

/** The whole rise behind a response, from a line through its upper part, and where it meets the baseline. */
function steepestEdge(w: EventWindow, x: Excess, height: number): LeadingEdge | undefined {
  let top = x.from;
  for (let i = x.from; i < x.to; i++) if (x.e[i] > x.e[top]) top = i;
  let to = top;
  while (to > x.from && x.e[to - 1] > TANGENT.to * height) to--;
  let from = to;
  while (from > x.from && x.e[from - 1] > TANGENT.from * height) from--;
  from = Math.max(x.from, Math.min(from, to - FEWEST_BINS));
  if (to - from < FEWEST_BINS) return undefined;
  const line = fitLine(w.t.subarray(from, to), x.e.subarray(from, to));
  if (!(line.slope > 0)) return undefined;
  const onsetS = -line.intercept / line.slope;
  // A line's height error at distance d from its middle is σ √((1 + d²/spread)/n).
  const n = to - from;
  const [first, last] = [w.t[from], w.t[to - 1]];
  const spread = ((last - first) ** 2 * (n + 1)) / (12 * (n - 1));
  const distance = onsetS - (first + last) / 2;
  const errorS = (w.noise / line.slope) * Math.sqrt((1 + distance ** 2 / spread) / n);
  const upper = { onsetS, slope: line.slope, errorS };
  return fitLeadingEdge(w.t, x.e, upper, x.from, to) ?? upper;
}

/** Time constant of the tail from the rows: ln of the excess against time, weighted by its square (the noise of a logarithm is 1/e). */
function tailOf(
  t: Float64Array,
  heat: Float64Array,
  noise: number,
  x: Excess,
  bell: Bell,
): { tailS?: number; tailErrorS?: number } {
  const above = (i: number) => heat[i] - baselineAt(x.baseline, t[i], 1);
  let from = lowerBound(t, bell.peakS);
  while (from < t.length && t[from] < x.baseline.rightS && above(from) > TAIL.high * bell.height) from++;
  let to = from;
  const least = Math.max(TAIL.low * bell.height, 3 * noise);
  while (to < t.length && t[to] < x.baseline.rightS && above(to) > least) to++;
  if (to - from < FEWEST_BINS) return {};
  const e = Float64Array.from({ length: to - from }, (_, k) => above(from + k));
  const line = fitLine(
    t.subarray(from, to),
    e.map(Math.log),
    e.map((v) => v * v),
  );
  if (!(line.slope < 0)) return {};
  return { tailS: -1 / line.slope, tailErrorS: line.slopeError / line.slope ** 2 };
}
