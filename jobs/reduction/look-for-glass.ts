import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { Segment } from '../../schema/wire/reduced.ts';
import { interpolate, lowerBound } from '../numeric/local-polynomial.ts';
import type { Bell } from './excess.ts';
import { findExcursions } from './find-event.ts';
import { findOnRamp, type GlassTransition, jumpAt, refineStep } from './glass-transition.ts';
import { findLocalStep, type LocalFindings, STEEP_WIDTHS } from './local-steps.ts';
import type { ScanContext } from './scan-context.ts';
import { slopeOf } from './segments.ts';
import { rangeOf } from './trace.ts';

/** Scales of a logistic step that a glass transition has, parts of the temperature: 10 to 90 % lie 4.4 of them apart. */
const SCALES = { least: 0.0025, most: 0.026, factor: 1.3 };
/** The lines beside a step, in its scales from its middle, and the fewest rows that tell their slope. */
const LINES = { near: 3, far: 6.7 };
const LEAST_ROWS = 6;
/** Full width of an event ÷ its temperature, at most: a broader one is a bend of the baseline and has no foot. */
const BROADEST_EVENT = 0.2;
/** Jumps of the signal taken out at most. */
const MOST_JUMPS = 4;
/** Melting or decomposition: an endotherm of this part of the signal. No glass is left from this many of its half widths before it on. */
const ENDOTHERM = { part: 0.2, before: 3 };

/** A glass transition, or the flag that says why none of what was seen is given as one. */
export interface Findings {
  glass?: GlassTransition;
  doubt?: Flag;
}

/**
 * The glass transition of a heating segment before row `end`: one step on a smooth baseline of the whole ramp, else, where no smooth baseline
 * describes the ramp, the one step that stands out of its surroundings. Jumps of the signal are taken out on the way.
 */
export function lookForGlass(c: ScanContext, segment: Segment, end: number, foot?: Bell): Findings {
  const { timeS, temperatureK } = c.scan;
  const sharp =
    foot &&
    (foot.leftS + foot.rightS) * segment.rateKPerS < BROADEST_EVENT * interpolate(timeS, temperatureK, foot.peakS);
  let { y } = c;
  for (let round = 0; ; round++) {
    const found = lookOnce(c, y, segment, end, sharp ? foot : undefined);
    const jump = found.glass && jumpAt(timeS, y, [segment.from, end], c.noise, found.glass);
    if (!jump) return found;
    if (round === MOST_JUMPS) return {};
    y = y.map((v, i) => (i < jump.row ? v : v - jump.height));
  }
}

function lookOnce(c: ScanContext, y: Float64Array, segment: Segment, end: number, foot: Bell | undefined): Findings {
  const { timeS, temperatureK } = c.scan;
  const { from, rateKPerS } = segment;
  const T = (t: number) => interpolate(timeS, temperatureK, t);
  const { glass, rough } = findOnRamp(timeS, y, from, end, c.noise, foot);
  if (!rough && !glass) return {};
  if (!rough && glass && stands(timeS, y, segment, glass, foot !== undefined)) return { glass };
  const rampEnd = endOfRamp(c, segment);
  const clear = Math.min(end, beforeEndotherm(timeS, y, from, rampEnd));
  const atK = (segment.startK + T(timeS[clear - 1])) / 2;
  const scalesS: number[] = [];
  for (let part = SCALES.least; part < SCALES.most; part *= SCALES.factor) scalesS.push((part * atK) / rateKPerS);
  const found = findLocalStep(timeS, y, from, clear, c.noise, scalesS, clear === rampEnd);
  if (found.step) return { glass: refineStep(timeS, y, c.noise, found.step) };
  const places = found.doubtful.map(({ middleS }) => middleS);
  if (glass && places.length === 0) places.push(glass.midpointS);
  return places.length > 0 ? { doubt: doubt(c, found.why, places.map(T)) } : {};
}

/** A step is higher than what the line before it, and behind it where no event follows, drifts by meanwhile. */
function stands(
  timeS: Float64Array,
  y: Float64Array,
  { from, to }: Segment,
  g: GlassTransition,
  followed: boolean,
): boolean {
  const slope = (fromS: number, toS: number) => {
    const [a, b] = [Math.max(from, lowerBound(timeS, fromS)), Math.min(to, lowerBound(timeS, toS))];
    return b - a < LEAST_ROWS ? 0 : Math.abs(slopeOf(timeS, y, a, b));
  };
  const before = slope(g.midpointS - LINES.far * g.scaleS, g.midpointS - LINES.near * g.scaleS);
  const behind = followed ? 0 : slope(g.midpointS + LINES.near * g.scaleS, g.midpointS + LINES.far * g.scaleS);
  return -g.step > STEEP_WIDTHS * g.scaleS * Math.max(before, behind);
}

/** Row from which the strongest endotherm may have begun. */
function beforeEndotherm(timeS: Float64Array, y: Float64Array, from: number, to: number): number {
  const flipped = y.map((v) => -v);
  const [strongest] = findExcursions(timeS, flipped, from, to);
  if (!strongest || strongest.prominence < ENDOTHERM.part * rangeOf(y, from, to)) return to;
  return lowerBound(timeS, strongest.peakS - ENDOTHERM.before * strongest.leftS);
}

function doubt(c: ScanContext, why: LocalFindings['why'], placesK: number[]): Flag {
  const shown = placesK.slice(0, 3).map((K) => `${K.toFixed(1)} K`);
  const several = shown.length > 1;
  const places = several ? `${shown.slice(0, -1).join(', ')} and ${shown[shown.length - 1]}` : shown[0];
  return flag(
    'glass-transition-doubtful',
    why === 'alike'
      ? `No glass transition is given: the endothermic steps at ${places} stand out alike, and one scan cannot tell which of them it is.`
      : `No glass transition is given: the endothermic ${several ? 'steps' : 'step'} at ${places} ${several ? 'are' : 'is'} no higher than the baseline drifts by meanwhile.`,
    'Subtract an empty scan as reference, or write the glass transition in samples.csv.',
    c.where,
  );
}

/** The last rows of a segment may belong to what follows: they are left out where no event says where to stop. */
const LAST_PART = 0.02;

export function endOfRamp(c: ScanContext, { from, to, startK, endK }: Segment): number {
  const lastK = endK - LAST_PART * (endK - startK);
  let end = to;
  while (end > from && c.scan.temperatureK[end - 1] > lastK) end--;
  return end;
}
