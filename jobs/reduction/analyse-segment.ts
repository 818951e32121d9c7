import { flag } from '../../schema/wire/flags.ts';
import type { ReducedEvent, Segment } from '../../schema/wire/reduced.ts';
import { interpolate, lowerBound } from '../numeric/local-polynomial.ts';
import type { Room } from './event-limits.ts';
import type { Bell } from './excess.ts';
import { type Excursion, findExcursions } from './find-event.ts';
import { GLASS_BEFORE, MOST_LEFT } from './glass-transition.ts';
import { reduceHold } from './hold.ts';
import { endOfRamp, lookForGlass } from './look-for-glass.ts';
import { findMelting } from './melting.ts';
import { reduceEvents, type Shown } from './reduce-event.ts';
import { offsetAt, type ScanContext } from './scan-context.ts';
import { rangeOf } from './trace.ts';

/** A further exotherm counts as an event from this part of the strongest one on. */
const LEAST_PART = 0.06;
/** Up to this part of a segment's rows an exotherm is the kick of its start. */
const START_PART = 0.08;
/** Reach of an event's foot and tail in half widths, and the flank two events need between them to stand apart, widths. */
const FOOT = 4;
const TAIL = 2.8;
const FLANK_BETWEEN = 0.35;

export interface SegmentFindings {
  events: ReducedEvent[];
  glass?: { midpointK: number; onsetK: number };
  meltingOnsetK?: number;
  shown: Shown[];
}

/** Exotherms of a segment in order of time. */
export function findEvents(c: ScanContext, segment: Segment): Excursion[] {
  const limits = limitsOf(c, segment);
  const inside = (x: Excursion) => !limits || (x.peakS > limits.leftS && x.peakS < limits.rightS);
  const all = findExcursions(c.scan.timeS, c.y, segment.from, segment.to).filter(inside);
  return all.filter((x) => x.prominence >= LEAST_PART * all[0].prominence).sort((a, b) => a.peakS - b.peakS);
}

/** The user's limits on the clock of a ramp; a hold has one temperature, so they say nothing there. */
function limitsOf({ input, scan, shiftAt }: ScanContext, segment: Segment): Room['limits'] {
  if (!input.limitsK || segment.kind === 'hold') return undefined;
  const up = segment.kind === 'heating';
  const timeOf = (trueK: number): number => {
    const measuredK = trueK - shiftAt(segment.rateKPerS, trueK);
    let i = segment.from;
    while (i < segment.to - 1 && (up ? scan.temperatureK[i] < measuredK : scan.temperatureK[i] > measuredK)) i++;
    return scan.timeS[i];
  };
  const [leftS, rightS] = input.limitsK.map(timeOf).sort((a, b) => a - b);
  return { leftS, rightS };
}

function limitsUnused({ input, where }: ScanContext, { segment, startK }: Segment) {
  const limits = (input.limitsK ?? []).map((K) => K.toFixed(1)).join(' to ');
  return flag(
    'limits-unused',
    `The limits ${limits} K were left out: segment ${segment} is a hold at ${startK.toFixed(1)} K and has one temperature, so they cut its event nowhere.`,
    'Take the limits back, or name a heating segment.',
    where,
  );
}

/** Events, glass transition and melting of one segment; `before` is the segment that leads to it. */
export function analyseSegment(
  c: ScanContext,
  segment: Segment,
  before: Segment | undefined,
  excursions: Excursion[],
): SegmentFindings {
  const { timeS, temperatureK } = c.scan;
  const bells: Bell[] = withoutRipple(c, segment, excursions).map((x) => ({ height: x.prominence, ...x }));
  if (segment.kind === 'hold') {
    if (c.input.limitsK) c.flags.push(limitsUnused(c, segment));
    return reduceHold(c, segment, before, bells);
  }
  // A step before the event makes its rough left half width come out too large.
  // The kick of a start hides no glass transition behind it.
  const kickEnd = segment.from + START_PART * (segment.to - segment.from);
  const event = bells.find((b) => lowerBound(timeS, b.peakS - GLASS_BEFORE * b.leftS) > kickEnd);
  const first = event && { ...event, leftS: Math.min(event.leftS, MOST_LEFT * event.rightS) };
  const glassEnd = first ? lowerBound(timeS, first.peakS - GLASS_BEFORE * first.leftS) : endOfRamp(c, segment);
  const looked = segment.kind === 'heating' ? lookForGlass(c, segment, glassEnd, first) : {};
  let { glass } = looked;
  const limits = limitsOf(c, segment);
  const groups = limits && bells.length > 0 ? [bells] : groupBells(bells);
  const highest = Math.max(...bells.map((b) => b.height));
  const endS = timeS[segment.to - 1];
  const events: ReducedEvent[] = [];
  const shown: Shown[] = [];
  let meltingS: number | undefined;
  groups.forEach((group, g) => {
    const last = group[group.length - 1];
    const previous = groups[g - 1]?.[groups[g - 1].length - 1];
    const after = groups[g + 1]?.[0];
    const toS = after ? after.peakS - FOOT * after.leftS : endS;
    const melting =
      segment.kind === 'heating'
        ? findMelting(timeS, c.y, lowerBound(timeS, last.peakS), lowerBound(timeS, toS), highest, last)
        : undefined;
    meltingS ??= melting?.onsetS;
    const room: Room = {
      fromS: previous ? previous.peakS + TAIL * previous.rightS : timeS[segment.from],
      toS,
      ...(limits ? { limits } : { ...(g === 0 && glass && { glass }), ...(melting && { melting }) }),
      responseS: c.responseS,
      ...knownArea(c, groups.length === 1 && group.length === 1),
    };
    const done = reduceEvents(c, segment, group, room, events.length + 1);
    events.push(...done.events);
    if (g === 0 && done.glass) glass = done.glass;
    if (done.shown) shown.push(done.shown);
  });
  const T = (t: number) => interpolate(timeS, temperatureK, t);
  if (!glass && looked.doubt) c.flags.push(looked.doubt);
  // A step or an onset comes late by the whole lag: the response delays it like everything else.
  const { calibration } = c.input;
  const trueK = (t: number) => T(t) - offsetAt(calibration, T(t)) - calibration.lagS * segment.rateKPerS;
  return {
    events,
    shown,
    ...(glass && { glass: { midpointK: trueK(glass.midpointS), onsetK: trueK(glass.onsetS) } }),
    ...(meltingS !== undefined && { meltingOnsetK: trueK(meltingS) }),
  };
}

/**
 * Exotherms below this part of the segment's signal are held against its glass transition, and are ripple below this part of that; not
 * where an endotherm above this part of the signal could be taken for the step.
 */
const SMALL = { ofSignal: 0.05, ofStep: 0.15, endotherm: 0.1 };

/** On a quiet instrument ripple of the baseline stands out of the noise: no event where a glass transition is seven times higher. */
function withoutRipple(c: ScanContext, segment: Segment, excursions: Excursion[]): Excursion[] {
  const highest = Math.max(0, ...excursions.map((x) => x.prominence));
  const { from, kind } = segment;
  const to = endOfRamp(c, segment);
  const range = rangeOf(c.y, from, to);
  if (highest === 0 || kind !== 'heating' || highest > SMALL.ofSignal * range) return excursions;
  const flipped = c.y.map((v) => -v);
  const endotherms = findExcursions(c.scan.timeS, flipped, from, to);
  if (endotherms.some((x) => x.prominence > SMALL.endotherm * range)) return excursions;
  const { glass } = lookForGlass(c, segment, to);
  return glass && highest < -SMALL.ofStep * glass.step ? [] : excursions;
}

/** Whole area of the event, W s or J/kg, where enthalpy (and mass) say it. */
function knownArea(c: ScanContext, single: boolean): { knownArea?: number } {
  const enthalpy = c.input.crystallizationEnthalpyJPerKg;
  if (!single || enthalpy === undefined) return {};
  if (c.scan.heatFlowUnit === 'W/kg') return { knownArea: enthalpy };
  return c.massKg === undefined ? {} : { knownArea: enthalpy * c.massKg };
}

/** Neighbours without room for a flank between them belong together. */
function groupBells(bells: Bell[]): Bell[][] {
  const groups: Bell[][] = [];
  for (const b of bells) {
    const group = groups[groups.length - 1];
    const a = group?.[group.length - 1];
    const between = a && b.peakS - FOOT * b.leftS - (a.peakS + TAIL * a.rightS);
    if (a && between < FLANK_BETWEEN * Math.min(a.leftS + a.rightS, b.leftS + b.rightS)) group.push(b);
    else groups.push([b]);
  }
  return groups;
}
