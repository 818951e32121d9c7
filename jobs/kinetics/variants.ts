import type { FitScan, ParameterRow } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID, type ReducedEvent } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { fitLine } from '../numeric/line.ts';
import { fitLocalPolynomial } from '../numeric/local-polynomial.ts';

/** Headline rows of another fit of the same event as rows of a variant: pooled values with Monte Carlo intervals. */
export function variantRows(rows: readonly ParameterRow[], variant: ParameterRow['variant']): ParameterRow[] {
  return rows
    .filter((r) => r.interval === 'monte_carlo' && r.variant === '' && r.conversion === null)
    .map((r) => ({ ...r, variant }));
}

/** A lag of more than this part of the width matters when it is not known how much of it smears. */
const RESPONSE_PART = 0.1;

/** Instruments whose response is not known and, on at least one of these scans, matters. */
export function unknownResponses(scans: readonly FitScan[], calibrations: readonly InstrumentCalibration[]): string[] {
  const matters = (c: InstrumentCalibration) =>
    c.responseS === undefined &&
    c.lagS > 0 &&
    scans.some((s) => s.instrument === c.instrument && c.lagS * s.event.rateKPerS > RESPONSE_PART * s.event.widthK);
  return calibrations.filter(matters).map((c) => c.instrument);
}

/**
 * The scans as they would be if all of the lag of these instruments were a first-order response: the other bound of `response-unknown`.
 * From the reduced curve alone: φ_true = φ + τ dφ/dt integrates to α_true = α + τ dα/dt, and the shift by τ β that the reduction
 * applied is taken back.
 */
export function assumeFullResponse(
  scans: readonly FitScan[],
  calibrations: readonly InstrumentCalibration[],
  instruments: readonly string[],
): FitScan[] {
  return scans.map((scan) => {
    const c = calibrations.find((k) => k.instrument === scan.instrument);
    return c && instruments.includes(c.instrument) ? { ...scan, event: undoResponse(scan.event, c.lagS) } : scan;
  });
}

/** Half width of the local polynomial of dα/dt, in full widths (window FWHM/8). */
const HALF_WINDOW = 1 / 8;

function undoResponse(event: ReducedEvent, lagS: number): ReducedEvent {
  const { curve, rateKPerS: rate } = event;
  const back = lagS * rate;
  if (!curve) return { ...event, onsetK: event.onsetK + back, peakK: event.peakK + back, endK: event.endK + back };
  const n = CONVERSION_GRID.length;
  const half = (HALF_WINDOW * event.widthK) / rate;
  const alpha = new Float64Array(n);
  const trueRate = new Float64Array(n);
  for (let k = 0; k < n; k++) {
    const local = fitLocalPolynomial(curve.timeS, curve.ratePerS, curve.timeS[k], half, 3);
    alpha[k] = CONVERSION_GRID[k] + lagS * curve.ratePerS[k];
    trueRate[k] = local.value + lagS * local.slope;
  }
  // The tail below the first row is needed again, since α has moved up: it is straight in ln α against t.
  const lnAlpha = alpha.map(Math.log);
  const tail = fitLine(curve.timeS.subarray(0, 5), lnAlpha.subarray(0, 5));
  const rows: number[] = [];
  for (let k = 0; k < n; k++)
    if (trueRate[k] > 0 && (rows.length === 0 || alpha[k] > alpha[rows[rows.length - 1]])) rows.push(k);
  const timeS = new Float64Array(n);
  const ratePerS = new Float64Array(n);
  const temperatureK = new Float64Array(n);
  CONVERSION_GRID.forEach((a, g) => {
    let i = rows.findIndex((k) => alpha[k] >= a);
    if (i < 0) i = rows.length - 1;
    if (i === 0) {
      timeS[g] = curve.timeS[0] + (Math.log(a) - lnAlpha[0]) / tail.slope;
      ratePerS[g] = a * tail.slope;
      temperatureK[g] = curve.temperatureK[0] + back + rate * (timeS[g] - curve.timeS[0]);
      return;
    }
    const [p, q] = [rows[i - 1], rows[i]];
    const f = (a - alpha[p]) / (alpha[q] - alpha[p]);
    const between = (v: Float64Array) => v[p] + f * (v[q] - v[p]);
    timeS[g] = between(curve.timeS);
    ratePerS[g] = Math.exp(Math.log(trueRate[p]) + f * (Math.log(trueRate[q]) - Math.log(trueRate[p])));
    temperatureK[g] = between(curve.temperatureK) + back;
  });
  return {
    ...event,
    ...landmarks(event, temperatureK, ratePerS, back),
    curve: {
      ...curve,
      timeS,
      ratePerS,
      temperatureK,
      ...cutProgramme(
        curve.programmeTimeS,
        curve.programmeTemperatureK.map((T) => T + back),
        timeS[0],
        temperatureK[0],
      ),
    },
  };
}

/** Peak by a parabola through the top of the rate, width at half of it, onset and end moved with the curve. */
function landmarks(e: ReducedEvent, T: Float64Array, rate: Float64Array, back: number): Partial<ReducedEvent> {
  let top = 1;
  for (let k = 1; k < rate.length - 1; k++) if (rate[k] > rate[top]) top = k;
  const local = fitLocalPolynomial(T, rate, T[top], e.widthK / 6, 2);
  const peakK = T[top] + (local.curvature < 0 ? -local.slope / local.curvature : 0);
  const high = rate[top] / 2;
  const cross = (from: number, step: 1 | -1) => {
    let k = from;
    while (k > 0 && k < rate.length - 1 && rate[k] > high) k += step;
    const f = (high - rate[k]) / (rate[k - step] - rate[k]);
    return T[k] + f * (T[k - step] - T[k]);
  };
  return { onsetK: e.onsetK + back, endK: e.endK + back, peakK, widthK: cross(top, 1) - cross(top, -1) };
}

/** The programme up to the new first row. */
function cutProgramme(timeS: Float64Array, temperatureK: Float64Array, endS: number, endK: number) {
  const keep = Array.from(timeS.keys()).filter((i) => timeS[i] < endS);
  return {
    programmeTimeS: Float64Array.from([...keep.map((i) => timeS[i]), endS]),
    programmeTemperatureK: Float64Array.from([...keep.map((i) => temperatureK[i]), endK]),
  };
}
