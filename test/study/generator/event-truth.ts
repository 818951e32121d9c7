import { integrate } from './integrator.ts';
import type { Leg } from './programme.ts';
import type { ScanModel } from './scan-model.ts';
import { createSystem, solveScan } from './solve-scan.ts';

/** Where an event truly peaks, from the root of d²α/dt² and not from the highest sample of a grid. */
export interface EventTruth {
  timeS: number;
  /** Temperature of the sample, K */
  peakK: number;
  ratePerS: number;
  conversionAtPeak: number;
  /** Full width at half maximum on the sample's temperature, K, and in s */
  widthK: number;
  widthS: number;
  /** Sample temperature at the asked conversions, K; NaN where the scan ends before */
  temperatureAtK: Record<string, number>;
}

const GRID = 1500;

/** Truth of every event of a scan. The peak is exact; width and T(α) are interpolated on a fine grid (to about 1e-5 of the width). */
export function eventTruths(model: ScanModel, conversions: readonly number[] = [0.1, 0.5, 0.9]): EventTruth[] {
  const { endS, legs } = model.programme;
  const grid = Float64Array.from({ length: GRID + 1 }, (_, k) => (endS * k) / GRID);
  const coarse = solveScan(model, grid);
  return model.sample.events.map((_, event) => {
    // A second grid over the event alone: a sharp event may have few points on the first.
    const alpha = coarse.conversion[event];
    const from = Math.max(0, alpha.findIndex((a) => a > 1e-5) - 1);
    const past = alpha.findIndex((a) => a > 1 - 1e-6);
    const to = past < 0 ? GRID : past;
    const times = Float64Array.from({ length: GRID + 1 }, (__, k) => grid[from] + ((grid[to] - grid[from]) * k) / GRID);
    const fine = solveScan(model, times);
    const rate = fine.ratePerS[event];
    let top = 0;
    for (let k = 1; k < rate.length; k++) if (rate[k] > rate[top]) top = k;
    const peak = locatePeak(model, event, times[Math.max(0, top - 1)], times[Math.min(GRID, top + 1)], legs);
    const half = peak.ratePerS / 2;
    const [rise, fall] = [crossing(rate, half, top, -1), crossing(rate, half, top, 1)];
    const temperatureAtK: Record<string, number> = {};
    for (const wanted of conversions) {
      const k = fine.conversion[event].findIndex((a) => a >= wanted);
      temperatureAtK[wanted] =
        k <= 0 ? Number.NaN : at(fine.sampleK, k - 1 + fraction(fine.conversion[event], k - 1, wanted));
    }
    return {
      ...peak,
      widthK: Math.abs(at(fine.sampleK, fall) - at(fine.sampleK, rise)),
      widthS: at(times, fall) - at(times, rise),
      temperatureAtK,
    };
  });
}

/** Bisection on the sign of d ln(dα/dt)/dt between two times of one leg. */
function locatePeak(model: ScanModel, event: number, earlyS: number, lateS: number, legs: Leg[]) {
  const system = createSystem(model);
  const leg = legs.find((candidate) => earlyS >= candidate.fromS && earlyS < candidate.toS) ?? legs[0];
  let state = system.start(legs[0]);
  for (const before of legs) {
    const stop = before === leg ? earlyS : before.toS;
    integrate(system.derivative(before), before.fromS, state, [stop], (_, __, y) => {
      state = y.slice();
    });
    if (before === leg) break;
  }
  const advance = (t: number): Float64Array => {
    let out = state;
    integrate(system.derivative(leg), earlyS, state, [t], (_, __, y) => {
      out = y.slice();
    });
    return out;
  };
  let [low, high] = [earlyS, Math.min(lateS, leg.toS)];
  for (let i = 0; i < 45; i++) {
    const middle = (low + high) / 2;
    if (system.logRateSlope(leg, middle, advance(middle), event) > 0) low = middle;
    else high = middle;
  }
  const timeS = (low + high) / 2;
  const y = advance(timeS);
  const now = system.look(leg, timeS, y);
  return {
    timeS,
    peakK: now.sampleK,
    ratePerS: now.rates[event],
    conversionAtPeak: model.sample.events[event].rate.conversion(y[2 + event]),
  };
}

const fraction = (column: Float64Array, k: number, value: number): number =>
  (value - column[k]) / (column[k + 1] - column[k]);

const at = (column: Float64Array, index: number): number => {
  const k = Math.min(column.length - 2, Math.floor(index));
  return column[k] + (index - k) * (column[k + 1] - column[k]);
};

/** Fractional index at which the column falls through `value` on one side of its top; the end of the column if it does not. */
function crossing(column: Float64Array, value: number, top: number, step: 1 | -1): number {
  let k = top;
  while (k + step >= 0 && k + step < column.length && column[k + step] > value) k += step;
  if (k + step < 0 || k + step >= column.length) return k;
  return step > 0 ? k + fraction(column, k, value) : k - 1 + fraction(column, k - 1, value);
}
