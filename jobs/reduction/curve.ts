import type { ReducedCurve, Segment } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';
import { binAt, type EventShape, trueSignal } from './conversion.ts';
import type { Excess } from './excess.ts';
import type { ScanContext } from './scan-context.ts';
import { slopeOf } from './segments.ts';
import type { EventWindow } from './window.ts';

/** Rows kept of the programme before α = 0.01, spaced by the square of their distance in time to it. */
const PROGRAMME_ROWS = 50;
/** Part of them on the ramp before a hold. */
const RAMP_SHARE = 0.4;

/** What led to an event: rows of the ramp and, on a hold, the time it ended, s. */
export interface Programme {
  rows: Segment;
  cornerS?: number;
}

/** An event on the conversion grid, with the programme from the start of its segment. */
export function makeCurve(
  c: ScanContext,
  w: EventWindow,
  x: Excess,
  shape: EventShape,
  times: Float64Array,
  T: (t: number) => number,
  baselineErrorK: Float64Array,
  programme: Programme,
  shiftK: number,
): ReducedCurve {
  const { scan } = c;
  const temperatureK = times.map(T);
  const least = 1e-9 / shape.widthS;
  const ratePerS = times.map((t) => Math.max(trueSignal(w, shape, t, binAt(w, x, t)).value / x.area, least));
  const { rows, cornerS } = programme;
  const start = scan.timeS[rows.from];
  // A corner is kept sharp: nodes on both sides of it, no averaging over rows across it.
  const half = cornerS === undefined ? shape.widthS / 20 : 0;
  const ramped = PROGRAMME_ROWS * RAMP_SHARE;
  const programmeTimeS = new Float64Array(PROGRAMME_ROWS);
  const programmeTemperatureK = new Float64Array(PROGRAMME_ROWS);
  for (let k = 0; k < PROGRAMME_ROWS; k++) {
    const f = (PROGRAMME_ROWS - 1 - k) / (PROGRAMME_ROWS - 1);
    const t =
      cornerS === undefined || cornerS >= times[0]
        ? times[0] - f * f * (times[0] - start)
        : k < ramped
          ? start + (k / ramped) * (cornerS - start)
          : cornerS + ((k - ramped) / (PROGRAMME_ROWS - 1 - ramped)) * (times[0] - cornerS);
    programmeTimeS[k] = t;
    programmeTemperatureK[k] =
      k === PROGRAMME_ROWS - 1 ? temperatureK[0] : meanTemperature(scan, rows, t, half) + shiftK;
  }
  return { timeS: times, temperatureK, ratePerS, baselineErrorK, programmeTimeS, programmeTemperatureK };
}

/** Temperature at t from a line through the rows within ± half, kept inside the segment: quiet, and true on a ramp. */
function meanTemperature(scan: ReadScan, segment: Segment, t: number, half: number): number {
  const { timeS, temperatureK } = scan;
  let a = Math.max(segment.from, lowerBound(timeS, t - half));
  let b = Math.min(segment.to, lowerBound(timeS, t + half) + 1);
  if (b - a < 2) {
    a = Math.max(segment.from, Math.min(a, segment.to - 2) - 1);
    b = Math.min(segment.to, a + 3);
  }
  let st = 0;
  let sT = 0;
  for (let i = a; i < b; i++) {
    st += timeS[i];
    sT += temperatureK[i];
  }
  const n = b - a;
  return sT / n + slopeOf(timeS, temperatureK, a, b) * (t - st / n);
}
