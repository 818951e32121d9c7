import { type Flag, flag } from '../../schema/wire/flags.ts';
import { CONVERSION_GRID, type ReducedCurve, type ReducedEvent, type Segment } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';
import { findLandmarks, type Landmarks } from './characteristic.ts';
import {
  baselineError,
  conversionOfTime,
  type EventShape,
  temperatureAt,
  timesOfGrid,
  trueSignal,
} from './conversion.ts';
import { type Excess, isolateEvent, straightLineArea } from './excess.ts';
import { type Excursion, noiseSigma } from './find-event.ts';
import { slopeOf } from './segments.ts';
import { averageWindow, type EventWindow } from './window.ts';

/** Rows kept of the programme before α = 0.01, spaced by the square of their distance in time to it. */
const PROGRAMME_ROWS = 50;
/** Half width of the event's surroundings that is looked at, full widths: limits and the longest flanks fit in. */
const SURROUNDINGS = { before: 8, behind: 7 };
const FEW_POINTS = 20;
const TOO_FEW_POINTS = 8;
const OFF_NOMINAL = 0.02;
const UNSTEADY = 0.05;
/** Areas above both baselines that differ by more than this raise `baseline-doubt`. */
const BASELINE_DOUBT = 0.05;

interface Reduced {
  event: ReducedEvent;
  shown?: { window: EventWindow; excess: Excess };
}

/**
 * One event: limits, baseline, landmarks and, where the data bear it, the conversion grid.
 * @param y heat flow with exotherm up, W or W/kg   @param flags findings are added here
 */
export function reduceEvent(
  scan: ReadScan,
  y: Float64Array,
  segment: Segment,
  found: Excursion,
  input: ReduceInput,
  flags: Flag[],
): Reduced | undefined {
  const { timeS, temperatureK } = scan;
  const { calibration } = input;
  const where = { file: input.file, sample: input.sample, instrument: calibration.instrument, event: 1 };
  const roughWidth = found.leftS + found.rightS;
  const from = Math.max(segment.from, lowerBound(timeS, found.peakS - SURROUNDINGS.before * roughWidth));
  const to = Math.min(segment.to, lowerBound(timeS, found.peakS + SURROUNDINGS.behind * roughWidth));
  const w = averageWindow(timeS, temperatureK, y, from, to, roughWidth, noiseSigma(y, from, to));
  const isolated = isolateEvent(w, { ...found, height: found.prominence });

  if ('cut' in isolated) {
    const peakK = temperatureAt(w, found.peakS, roughWidth / 10);
    flags.push(
      flag(
        'event-cut',
        `The event at ${peakK.toFixed(1)} K is cut ${isolated.cut === 'before' ? 'by the start' : 'by the end'} of the segment (${segment.startK.toFixed(1)} to ${segment.endK.toFixed(1)} K); it is not normalised and stays out of the conversion methods.`,
        isolated.cut === 'before' ? 'Start the scan lower.' : 'Scan to a higher temperature.',
        where,
      ),
    );
    return undefined;
  }

  const x = isolated.excess;
  const b = x.baseline;
  const responseS = Math.max(0, calibration.responseS ?? 0);
  const shape: EventShape = { peakS: b.peakS, widthS: b.widthS, responseS };
  const marks = findLandmarks(w, x, shape);
  const rate = eventRate(timeS, temperatureK, marks, input, where, flags);
  const shiftK = -calibration.offsetK - (calibration.lagS - responseS) * rate;
  const T = (t: number) => temperatureAt(w, t, b.widthS / 10) + shiftK;
  const points = Math.round((marks.widthS / (timeS[to - 1] - timeS[from])) * (to - from));
  const area = x.area;
  const { error, areaError } = baselineError(w, x, shape, isolated.height, rate);
  const stepK = (rate * (timeS[to - 1] - timeS[from])) / (to - from);
  const event: ReducedEvent = {
    event: 1,
    kind: 'heating',
    rateKPerS: rate,
    onsetK: T(marks.onsetS),
    peakK: T(marks.peakS),
    endK: T(marks.endS),
    widthK: marks.widthS * rate,
    centroidK: T(marks.centroidS),
    peakErrorK: Math.max(rate * marks.peakErrorS, points < TOO_FEW_POINTS ? stepK / Math.sqrt(12) : 0),
    area,
    areaError: Math.hypot(areaError, w.noise * Math.sqrt((x.to - x.from) * (w.t[1] - w.t[0]) ** 2)),
    usableFrom: CONVERSION_GRID[0],
    usableTo: CONVERSION_GRID[CONVERSION_GRID.length - 1],
    pointsOverWidth: points,
    noiseFraction: (w.noise * Math.sqrt(w.binSize)) / marks.height,
    rampStartK: segment.startK + shiftK,
  };
  if (scan.heatFlowUnit === 'W/kg') event.enthalpyJPerKg = area;
  else if (input.massKg) event.enthalpyJPerKg = area / input.massKg;
  judgeEvent(event, straightLineArea(w, x), calibration.lagS * rate, calibration.responseS === undefined, where, flags);
  if (points >= FEW_POINTS && area > 5 * event.areaError) {
    event.curve = makeCurve(w, x, shape, T, rate, error, scan, segment, shiftK);
  }
  return { event, shown: { window: w, excess: x } };
}

function eventRate(
  timeS: Float64Array,
  temperatureK: Float64Array,
  m: Landmarks,
  input: ReduceInput,
  where: object,
  flags: Flag[],
): number {
  const a = lowerBound(timeS, m.peakS - 1.5 * m.widthS);
  const c = Math.max(a + 3, lowerBound(timeS, m.peakS + 1.5 * m.widthS));
  const rate = slopeOf(timeS, temperatureK, a, c);
  const middle = (a + c) >> 1;
  const drift = slopeOf(timeS, temperatureK, middle, c) / slopeOf(timeS, temperatureK, a, middle) - 1;
  if (c - a >= 40 && Math.abs(drift) > UNSTEADY) {
    flags.push(
      flag(
        'rate-unsteady',
        `The heating rate changes by ${(100 * drift).toFixed(1)} % within the event (limit 5 %).`,
        'Check the instrument’s control at this rate; the measured programme is used, peak methods are less certain.',
        where,
      ),
    );
  }
  const nominal = input.rateNominalKPerS;
  if (nominal !== undefined && Math.abs(rate / nominal - 1) > OFF_NOMINAL) {
    flags.push(
      flag(
        'rate-off-nominal',
        `The measured rate ${rate.toPrecision(4)} K/s is ${(100 * (rate / nominal - 1)).toFixed(1)} % off the nominal ${nominal.toPrecision(4)} K/s (limit 2 %).`,
        'The measured rate is used; correct the rate column of scans.csv if it is a slip.',
        where,
      ),
    );
  }
  return rate;
}

function judgeEvent(
  e: ReducedEvent,
  straightArea: number,
  lagK: number,
  responseUnknown: boolean,
  where: object,
  flags: Flag[],
): void {
  if (e.pointsOverWidth < FEW_POINTS) {
    flags.push(
      flag(
        'few-points',
        `Only ${e.pointsOverWidth} points lie over the event’s width (20 are needed for conversion methods).`,
        'Sample faster or scan slower.',
        where,
      ),
    );
  }
  if (e.area < 5 * e.areaError) {
    flags.push(
      flag(
        'event-small',
        `The area ${e.area.toPrecision(3)} is below five times its error ${e.areaError.toPrecision(2)}; only temperatures are used.`,
        'Use more mass or a higher rate.',
        where,
      ),
    );
  }
  const difference = straightArea / e.area - 1;
  if (Math.abs(difference) > BASELINE_DOUBT) {
    flags.push(
      flag(
        'baseline-doubt',
        `A straight baseline gives an area ${(100 * difference).toFixed(1)} % different from the conversion-weighted one (limit 5 %).`,
        'Look at the thermogram and its limits.',
        where,
      ),
    );
  }
  if (e.enthalpyJPerKg === undefined) {
    flags.push(
      flag(
        'mass-unknown',
        'No mass was given, so there is no enthalpy per gram; kinetics does not need it.',
        'Give the mass in scans.csv if the enthalpy matters.',
        where,
      ),
    );
  }
  if (responseUnknown && Math.abs(lagK) > 0.1 * e.widthK) {
    flags.push(
      flag(
        'response-unknown',
        `The lag shifts the event by ${lagK.toFixed(2)} K, more than a tenth of its width ${e.widthK.toFixed(2)} K, and it is not known how much of it smears the signal.`,
        'Give the response time [s] in instruments.csv, or run standards.',
        where,
      ),
    );
  }
}

function makeCurve(
  w: EventWindow,
  x: Excess,
  shape: EventShape,
  T: (t: number) => number,
  rate: number,
  baselineErrorK: Float64Array,
  scan: ReadScan,
  segment: Segment,
  shiftK: number,
): ReducedCurve {
  const times = timesOfGrid(w, x, conversionOfTime(w, x, shape), shape.peakS);
  const temperatureK = times.map((t) => T(t));
  const ratePerS = times.map((t) => Math.max(trueSignal(w, x, shape, t).value / x.area, 1e-9 * (rate / shape.widthS)));
  const start = scan.timeS[segment.from];
  const programmeTimeS = new Float64Array(PROGRAMME_ROWS);
  const programmeTemperatureK = new Float64Array(PROGRAMME_ROWS);
  for (let k = 0; k < PROGRAMME_ROWS; k++) {
    const f = (PROGRAMME_ROWS - 1 - k) / (PROGRAMME_ROWS - 1);
    const t = times[0] - f * f * (times[0] - start);
    programmeTimeS[k] = t;
    programmeTemperatureK[k] =
      k === PROGRAMME_ROWS - 1 ? temperatureK[0] : meanTemperature(scan, segment, t, shape.widthS / 20) + shiftK;
  }
  return { timeS: times, temperatureK, ratePerS, baselineErrorK, programmeTimeS, programmeTemperatureK };
}

/** Temperature at t from a line through the rows within ± half, kept inside the segment: quiet, and true on a ramp. */
function meanTemperature(scan: ReadScan, segment: Segment, t: number, half: number): number {
  const { timeS, temperatureK } = scan;
  let a = Math.max(segment.from, lowerBound(timeS, t - half));
  let c = Math.min(segment.to, lowerBound(timeS, t + half) + 1);
  if (c - a < 2) {
    a = Math.max(segment.from, Math.min(a, segment.to - 2) - 1);
    c = Math.min(segment.to, a + 3);
  }
  let st = 0;
  let sT = 0;
  for (let i = a; i < c; i++) {
    st += timeS[i];
    sT += temperatureK[i];
  }
  const n = c - a;
  return sT / n + slopeOf(timeS, temperatureK, a, c) * (t - st / n);
}
