import { flag } from '../../schema/wire/flags.ts';
import { CONVERSION_GRID, type ReducedEvent, type Segment } from '../../schema/wire/reduced.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';
import { findLandmarks, type Landmarks } from './characteristic.ts';
import {
  baselineError,
  binAt,
  conversionOfTime,
  shapeEvent,
  temperatureAt,
  timesOfGrid,
  trueSignal,
} from './conversion.ts';
import { makeCurve, type Programme } from './curve.ts';
import { FEW_POINTS, judgeEvent, TOO_FEW_POINTS } from './event-flags.ts';
import { type Room, widthOf } from './event-limits.ts';
import { type Bell, type Excess, straightLineArea } from './excess.ts';
import type { GlassTransition } from './glass-transition.ts';
import type { Isolated } from './isolate.ts';
import { eventRate } from './rate.ts';
import type { ScanContext } from './scan-context.ts';
import { type SelfHeating, selfHeatingOf, warmingOf } from './self-heating.ts';
import { separateEvents } from './separate-events.ts';
import { undoResponse } from './undo-response.ts';
import { averageWindow, type EventWindow, flickerOf } from './window.ts';

/** Half width of the surroundings that are looked at, full widths: limits and the longest flanks fit in. */
const SURROUNDINGS = { before: 8, behind: 7 };
/** Where an event is, half widths from its peak: beyond, what is not smooth is noise. */
const EVENT_REACH = { left: 4, right: 2.8 };
/**
 * What noise that does not average out leaves open, in units of it: of the mean height over the width, and of the conversion in the middle
 * of the event (study `reduction`, pink noise).
 */
const FLICKER = { area: 2, conversion: 1.5 };
/** From this part of the measured width on a response is undone before limits are set: its tail is longer than the event's own. */
const UNDONE_FIRST = 0.3;
const USABLE = { glass: 0.1, melting: 0.8 };

export interface Shown {
  window: EventWindow;
  excess: Excess;
}

/**
 * Events that stand together: one, or several that overlap. Limits, baseline, landmarks and, where the data bear it, the conversion grid.
 * @param bells rough, in order of time   @param first number of the first event
 * @param programme what leads there; by default the segment itself
 */
export function reduceEvents(
  c: ScanContext,
  segment: Segment,
  bells: Bell[],
  room: Room,
  first: number,
  programme: Programme = { rows: segment },
): { events: ReducedEvent[]; shown?: Shown; glass?: GlassTransition } {
  const { timeS } = c.scan;
  const width = widthOf(bells);
  const [begin, last] = [bells[0], bells[bells.length - 1]];
  const from = Math.max(segment.from, lowerBound(timeS, begin.peakS - SURROUNDINGS.before * width));
  const to = Math.min(segment.to, lowerBound(timeS, last.peakS + SURROUNDINGS.behind * width));
  const averaged = averageWindow(timeS, c.scan.temperatureK, c.y, from, to, width, c.noise);
  const beside = [begin.peakS - EVENT_REACH.left * begin.leftS, last.peakS + EVENT_REACH.right * last.rightS] as const;
  const measured = { ...averaged, flicker: flickerOf(averaged, width, ...beside) };
  const undone = room.responseS > UNDONE_FIRST * width;
  const w = undone ? undoResponse(measured, room.responseS, width) : measured;
  const separated = separateEvents(w, bells, undone ? { ...room, responseS: 0 } : room);
  if ('cut' in separated) {
    const events = bells.map((bell, i) => cutEvent(c, w, segment, bell, separated.cut, first + i));
    return { events };
  }
  const { isolated, parts } = separated;
  const events: ReducedEvent[] = [];
  parts.forEach((x, i) => {
    const number = first + events.length;
    const event = completeEvent(c, w, segment, isolated, x, i, room, number, parts.length, programme);
    if (event) events.push(event);
  });
  const { together } = isolated;
  return { events, shown: { window: w, excess: isolated.excess }, ...(together && { glass: together.glass }) };
}

function completeEvent(
  c: ScanContext,
  w: EventWindow,
  segment: Segment,
  isolated: Isolated,
  x: Excess,
  index: number,
  room: Room,
  number: number,
  together: number,
  programme: Programme,
): ReducedEvent | undefined {
  const { input, scan } = c;
  const { calibration } = input;
  const where = { ...c.where, event: number };
  const responseS = c.responseS - w.undoneS;
  const bell = isolated.bells[index];
  const shape = shapeEvent(w, x, bell, responseS);
  const marks = findLandmarks(w, x, shape);
  // A valley between two humps of the baseline, not an event; what the user has set limits to is one, however cut.
  if (!room.limits && !(x.area > 0 && marks.widthS > 0)) return undefined;
  const rate = eventRate(c, marks, segment, where);
  const shiftK = c.shiftAt(rate, temperatureAt(w, marks.peakS, shape.widthS / 10));
  const T = (t: number) => temperatureAt(w, t, shape.widthS / 10) + shiftK;
  const warming = warmingOf(c, w, x, shape);
  const perSecond = 1 / ((w.t[1] - w.t[0]) / w.binSize);
  const points = Math.round(marks.widthS * perSecond);
  const times = timesOfGrid(w, x, conversionOfTime(w, x, shape), shape.peakS);
  const refit = (left: number, right: number) => {
    const moved = isolated.refit(left, right);
    return x.share ? partOf(moved, x.share, w) : moved;
  };
  const baseline = baselineError(w, x, shape, times, refit);
  const tail = isolated.meltingOverlap && room.knownArea === undefined ? HIDDEN_TAIL_PART * x.area : 0;
  const open = Math.hypot(tail, (x.openPart ?? 0) * x.area);
  const flickerWs = FLICKER.conversion * w.flicker * shape.widthS;
  const error = baseline.error.map((s, k) => {
    const signal = trueSignal(w, shape, times[k], binAt(w, x, times[k])).value;
    const hidden = (open * CONVERSION_GRID[k]) / signal;
    const own = (flickerWs * Math.sqrt(CONVERSION_GRID[k] * (1 - CONVERSION_GRID[k]))) / signal;
    return Math.hypot(Math.hypot(s, hidden, own) * Math.abs(rate), warming.part * warming.at(times[k]));
  });
  const stepK = Math.abs(rate) / perSecond;
  const binS = w.t[1] - w.t[0];
  const event: ReducedEvent = {
    event: number,
    kind: segment.kind,
    rateKPerS: rate,
    onsetK: T(marks.onsetS),
    peakK: T(marks.peakS) + warming.at(marks.peakS),
    endK: T(marks.endS),
    widthK: marks.widthS * Math.abs(rate),
    centroidK: T(marks.centroidS) + warming.mean,
    peakErrorK: Math.hypot(
      Math.max(Math.abs(rate) * marks.peakErrorS, points < TOO_FEW_POINTS ? stepK / Math.sqrt(12) : 0),
      warming.part * warming.at(marks.peakS),
      MOVED_PEAK * (x.openPart ?? 0) * marks.widthS * Math.abs(rate),
    ),
    area: x.area,
    areaError: Math.hypot(
      baseline.areaError,
      w.noise * Math.sqrt((x.to - x.from) * binS ** 2),
      FLICKER.area * w.flicker * shape.widthS,
      separationError(x),
      tail,
      isolated.together?.areaError ?? 0,
    ),
    usableFrom: isolated.glassOverlap ? USABLE.glass : CONVERSION_GRID[0],
    usableTo: isolated.meltingOverlap ? USABLE.melting : CONVERSION_GRID[CONVERSION_GRID.length - 1],
    pointsOverWidth: points,
    noiseFraction: (w.noise * Math.sqrt(w.binSize)) / marks.height,
    rampStartK: programme.rows.startK + shiftK,
  };
  if (scan.heatFlowUnit === 'W/kg') event.enthalpyJPerKg = x.area;
  else if (c.massKg) event.enthalpyJPerKg = x.area / c.massKg;
  let selfHeating: SelfHeating | undefined;
  if (points >= FEW_POINTS && x.area > 5 * event.areaError) {
    event.curve = makeCurve(c, w, x, shape, times, (t) => T(t) + warming.at(t), error, programme, shiftK);
    if (segment.kind === 'heating') {
      const enthalpy = event.enthalpyJPerKg ?? input.crystallizationEnthalpyJPerKg;
      selfHeating = selfHeatingOf(c, event.curve, warming.most, enthalpy);
      if (selfHeating && !selfHeating.bound) event.selfHeating = selfHeating.number;
    }
  }
  c.flags.push(
    ...judgeEvent(
      event,
      {
        straightArea: straightLineArea(w, x),
        lagK: calibration.lagS * rate,
        responseUnknown: calibration.responseS === undefined,
        ...(selfHeating && { selfHeating }),
        warmingK: warming.at(marks.peakS),
        contactKnown: c.contactS > 0,
        glassOverlap: isolated.glassOverlap,
        meltingOverlap: isolated.meltingOverlap,
        knownArea: room.knownArea !== undefined,
        mergedWith: together - 1,
      },
      where,
    ),
  );
  return event;
}

/** Share of an area that the separation of overlapping events leaves open at least, from trials at one width apart (study `reduction`). */
const SEPARATION_PART = 0.02;
/** What an area that is open by its whole leaves open of the peak's place, widths. */
const MOVED_PEAK = 0.25;
const separationError = (x: Excess): number =>
  x.openPart === undefined ? 0 : Math.hypot(SEPARATION_PART, x.openPart) * x.area;

/** What a JMAK-shaped tail behind the melting leaves open of the area (study `reduction`, melting one width above). */
const HIDDEN_TAIL_PART = 0.01;

/** The part of a refitted excess that belongs to one of several events. */
function partOf(moved: Excess, share: Float64Array, w: EventWindow): Excess {
  const e = moved.e.map((v, i) => v * share[i]);
  const cumulative = new Float64Array(e.length);
  let sum = 0;
  for (let i = moved.from + 1; i < moved.to; i++) {
    sum += 0.5 * (e[i] + e[i - 1]) * (w.t[i] - w.t[i - 1]);
    cumulative[i] = sum;
  }
  cumulative.fill(sum, moved.to);
  return { ...moved, e, cumulative, area: sum, share };
}

/** Temperatures of an event that is not there as a whole: its peak where the signal turns, no curve. */
function cutEvent(
  c: ScanContext,
  w: EventWindow,
  segment: Segment,
  bell: Bell,
  side: 'before' | 'behind',
  number: number,
): ReducedEvent {
  const width = bell.leftS + bell.rightS;
  const marks: Landmarks = {
    onsetS: bell.peakS - 1.5 * bell.leftS,
    peakS: bell.peakS,
    endS: bell.peakS + 1.5 * bell.rightS,
    widthS: width,
    centroidS: bell.peakS,
    peakErrorS: 0.05 * width,
    height: bell.height,
  };
  const where = { ...c.where, event: number };
  const rate = eventRate(c, marks, segment, where);
  const shiftK = c.shiftAt(rate, temperatureAt(w, bell.peakS, width / 10));
  const T = (t: number) => temperatureAt(w, t, width / 10) + shiftK;
  c.flags.push(
    flag(
      'event-cut',
      `The event at ${T(bell.peakS).toFixed(1)} K is cut ${side === 'before' ? 'by the start' : 'by the end'} of the segment (${segment.startK.toFixed(1)} to ${segment.endK.toFixed(1)} K); it is not normalised and stays out of the conversion methods.`,
      side === 'before' ? 'Start the scan lower.' : 'Scan to a higher temperature.',
      where,
    ),
  );
  // A bell of this height and width: an order of magnitude, with an error to match.
  const area = bell.height * width;
  return {
    event: number,
    kind: segment.kind,
    rateKPerS: rate,
    onsetK: T(marks.onsetS),
    peakK: T(marks.peakS),
    endK: T(Math.min(marks.endS, w.t[w.t.length - 1])),
    widthK: width * Math.abs(rate),
    centroidK: T(marks.centroidS),
    peakErrorK: marks.peakErrorS * Math.abs(rate),
    area,
    areaError: area,
    usableFrom: 0,
    usableTo: 0,
    pointsOverWidth: Math.round((width * w.binSize) / (w.t[1] - w.t[0])),
    noiseFraction: (w.noise * Math.sqrt(w.binSize)) / bell.height,
    rampStartK: segment.startK + shiftK,
  };
}
