import type { ReducedEvent, Segment } from '../../schema/wire/reduced.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';
import { mean, median, robustSigma } from '../numeric/statistics.ts';
import type { Bell } from './excess.ts';
import { reduceEvents, type Shown } from './reduce-event.ts';
import type { ScanContext } from './scan-context.ts';

/** The hold is reached when the temperature is this near to it, K, or within this many sigmas of its noise. */
const REACHED = { K: 0.1, sigmas: 4 };
/** The signal has settled this many lags after that. */
const SETTLED_LAGS = 5;

/**
 * Events of a hold: isothermal scans. The curve keeps the clock of the scan and the programme from the start of the ramp before, so that
 * what crystallised on the way and the induction time are not lost.
 * @param ramp the segment before the hold
 */
export function reduceHold(
  c: ScanContext,
  segment: Segment,
  ramp: Segment | undefined,
  bells: Bell[],
): { events: ReducedEvent[]; shown: Shown[] } {
  const { timeS, temperatureK } = c.scan;
  if (bells.length === 0) return { events: [], shown: [] };
  const quiet = temperatureK.subarray(Math.floor((segment.from + segment.to) / 2), segment.to);
  const levelK = median(quiet);
  const tolerance = Math.max(REACHED.K, REACHED.sigmas * robustSigma(quiet));
  const start = ramp?.from ?? segment.from;
  let reached = Math.min(segment.to - 1, segment.from + ((segment.to - segment.from) >> 1));
  while (reached > start && Math.abs(temperatureK[reached - 1] - levelK) <= tolerance) reached--;
  const { lagS } = c.input.calibration;
  const { responseS } = c;
  const holdReachedS = timeS[reached];
  const fromS = holdReachedS + SETTLED_LAGS * Math.max(0, lagS, responseS);
  const hold = { ...segment, from: Math.min(lowerBound(timeS, fromS), segment.to - 8) };
  const toS = timeS[segment.to - 1];
  const room = { fromS, toS, responseS, footless: true };
  const rows = ramp ? { ...segment, from: ramp.from, startK: ramp.startK } : segment;
  const { events, shown } = reduceEvents(c, hold, bells, room, 1, { rows, cornerS: holdReachedS });
  return {
    events: events.map((event) => ({
      ...event,
      holdK: event.curve ? mean(event.curve.temperatureK) : event.peakK,
      holdReachedS,
    })),
    shown: shown ? [shown] : [],
  };
}
