import type { Flag } from './flags.ts';

/** Conversions at which every reduced scan is kept: 0.01 … 0.99. */
export const CONVERSION_GRID: readonly number[] = Array.from({ length: 99 }, (_, i) => (i + 1) / 100);

/** One event of one scan on the conversion grid (99 rows) with the programme before it. Temperatures are true (lag and offset removed). */
export interface ReducedCurve {
  /** s, time at each grid conversion, on the clock of the scan */
  timeS: Float64Array;
  /** K */
  temperatureK: Float64Array;
  /** 1/s, dα/dt */
  ratePerS: Float64Array;
  /** K: shift of T(α) when the event's limits move by one noise length and 10 % of the width: the baseline's share of the uncertainty (one standard error) */
  baselineErrorK: Float64Array;
  /** s, K: the programme from its start to α = 0.01 (about 50 rows, last row = the grid's first) */
  programmeTimeS: Float64Array;
  programmeTemperatureK: Float64Array;
}

export interface ReducedEvent {
  event: number;
  /** Kind of the segment it lies in; heating, cooling and hold never share a fit */
  kind: 'heating' | 'cooling' | 'hold';
  /** Hold only: its mean temperature over the event, K, and the time it was reached, s, on the clock of the curve */
  holdK?: number;
  holdReachedS?: number;
  rateKPerS: number;
  onsetK: number;
  peakK: number;
  endK: number;
  /** Full width at half maximum, K */
  widthK: number;
  /** Time centroid expressed as a temperature, K */
  centroidK: number;
  /** One standard error of the peak from noise and sampling, K */
  peakErrorK: number;
  /** Area, J (heat flow in W) or J/kg (W/kg) */
  area: number;
  areaError: number;
  enthalpyJPerKg?: number;
  /** Conversion range that may be used, e.g. [0.01, 0.99], [0.01, 0.8] where melting overlaps */
  usableFrom: number;
  usableTo: number;
  /** Points over the full width at half maximum */
  pointsOverWidth: number;
  /** Noise of the signal divided by the event's height (one standard deviation) */
  noiseFraction: number;
  /** Start of the linear ramp, K (for Augis–Bennett) */
  rampStartK: number;
  /** Self-heating number S, where lag and enthalpy are known; above 1 the event stays out of the kinetics */
  selfHeating?: number;
  /** Missing for a cut event or too few points: temperatures only */
  curve?: ReducedCurve;
}

/** A segment of the temperature programme, 1-based in time order; rows [from, to). */
export interface Segment {
  segment: number;
  kind: 'heating' | 'cooling' | 'hold';
  from: number;
  to: number;
  rateKPerS: number;
  startK: number;
  endK: number;
}

/** Decimated traces for the plots, at most 2 000 points, extremes kept. Exotherm up. */
export interface ReducedTrace {
  temperatureK: Float64Array;
  heatFlow: Float64Array;
  baseline: Float64Array;
  /** s from the start of the segment; of a hold only, whose temperature tells nothing */
  timeS?: Float64Array;
}

/** Melting of a calibration standard on one scan, uncorrected for offset and lag. */
export interface StandardMelting {
  rateKPerS: number;
  /** K: tangent at the steepest point of the leading edge meets the baseline before the peak (ISO 11357-1) */
  onsetK: number;
  onsetErrorK: number;
  peakK: number;
  /** J (heat flow in W) or J/kg */
  area: number;
  areaError: number;
  /** s: time constant of the exponential tail behind the peak, where it can be fitted */
  tailS?: number;
  tailErrorS?: number;
  /** K/W: rate ÷ slope of the leading edge; heat flow in W only */
  resistanceKPerW?: number;
}

export interface ReducedScan {
  segments: Segment[];
  /** Segment analysed, 1-based */
  segment: number;
  massKg?: number;
  /** Of the trace; a voltage is W by the instrument's sensitivity */
  heatFlowUnit: 'W' | 'W/kg';
  /** Half-height midpoint (ISO 11357-2) and extrapolated onset of the glass transition, K */
  glassTransitionK?: number;
  glassTransitionOnsetK?: number;
  /** Extrapolated onset of melting, where seen, K */
  meltingOnsetK?: number;
  /** Scans of a standard only: its melting as measured, no correction applied */
  standard?: StandardMelting;
  events: ReducedEvent[];
  trace: ReducedTrace;
  flags: Flag[];
}

export type ReduceOutcome =
  | { ok: true; reduced: ReducedScan }
  | {
      ok: false;
      code: 'sign-unknown' | 'file-damaged' | 'reference-unused';
      reason: string;
      action: string;
      flags: Flag[];
    };
