import type { FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { R, type TemperatureLaw } from './generator/temperature-laws.ts';

/** What an instrument does to an event, as true values. */
export interface TrueInstrument {
  offsetK: number;
  /** s, whole net lag: centroid moves by exactly lag × rate */
  lagS: number;
  /** part of the lag that is a first-order response (0 … 1) */
  responseShare: number;
}

export interface ExactEvent {
  centroidK: number;
  peakK: number;
  widthK: number;
  /** at each conversion of the grid */
  temperatureK: Float64Array;
  ratePerS: Float64Array;
}

const POINTS = 1200;

/**
 * Temperature at which X = ∫K dT/β has roughly reached a value, K. Looked for below the temperature of the fastest rate constant: a law
 * with a driving force turns round under the melting temperature.
 */
export function roughTemperature(law: TemperatureLaw, rateKPerS: number, extended: number, fastestK: number): number {
  let [low, high] = [60, fastestK];
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2;
    const reached = law.lnK(middle) + Math.log((R * middle ** 2) / (law.localEnergy(middle) * rateKPerS));
    if (reached < Math.log(extended)) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/**
 * A JMAK event on an ideal ramp from the law itself: X = ∫K dT/β by Simpson's rule on a fine grid, the signal of a first-order response by
 * its exact recursion, the rest of the lag as a shift. No calorimeter curve is made: a study of thousands of events runs in seconds.
 */
export function exactEvent(
  law: TemperatureLaw,
  exponent: number,
  rateKPerS: number,
  instrument: TrueInstrument,
  fastestK = 4000,
): ExactEvent {
  const n = exponent;
  const responseK = Math.max(0, instrument.lagS * instrument.responseShare) * rateKPerS;
  const shiftK = instrument.offsetK + instrument.lagS * rateKPerS - responseK;
  const low = roughTemperature(law, rateKPerS, 2e-6 ** (1 / n), fastestK);
  // The start is earlier than the event: what lies below counts through the law's own tail.
  const high = roughTemperature(law, rateKPerS, 14 ** (1 / n), fastestK) + 7 * responseK;
  const h = (high - low) / POINTS;
  const K = (T: number): number => Math.exp(law.lnK(T)) / rateKPerS;
  let X = (Math.exp(law.lnK(low)) * R * low ** 2) / (law.localEnergy(low) * rateKPerS);
  const T = new Float64Array(POINTS + 1);
  const signal = new Float64Array(POINTS + 1);
  let k0 = K(low);
  let filtered = 0;
  let before = 0;
  const keep = responseK > 0 ? Math.exp(-h / responseK) : 0;
  for (let i = 0; i <= POINTS; i++) {
    T[i] = low + i * h;
    if (i > 0) {
      const k1 = K(T[i]);
      X += (h / 6) * (k0 + 4 * K(T[i] - h / 2) + k1);
      k0 = k1;
    }
    const rate = n * X ** (n - 1) * Math.exp(-(X ** n)) * k0;
    if (responseK > 0) {
      // Exact for a signal that is linear within a step.
      const slope = (rate - before) / h;
      filtered = rate - slope * responseK + (filtered - before + slope * responseK) * keep;
      before = rate;
      signal[i] = filtered;
    } else signal[i] = rate;
  }
  return landmarks(T, signal, h, shiftK, rateKPerS);
}

function landmarks(T: Float64Array, signal: Float64Array, h: number, shiftK: number, rateKPerS: number): ExactEvent {
  const cumulative = new Float64Array(T.length);
  let top = 0;
  let moment = 0;
  for (let i = 1; i < T.length; i++) {
    cumulative[i] = cumulative[i - 1] + (h / 2) * (signal[i] + signal[i - 1]);
    moment += (h / 2) * (signal[i] * T[i] + signal[i - 1] * T[i - 1]);
    if (signal[i] > signal[top]) top = i;
  }
  const area = cumulative[T.length - 1];
  const [a, b, c] = [signal[top - 1], signal[top], signal[top + 1]];
  const peak = T[top] + (h * (a - c)) / (2 * (a - 2 * b + c));
  const half = b / 2;
  let [left, right] = [top, top];
  while (left > 0 && signal[left] > half) left--;
  while (right < T.length - 1 && signal[right] > half) right++;
  const cross = (i: number): number => T[i] + (h * (half - signal[i])) / (signal[i + 1] - signal[i]);
  const temperatureK = new Float64Array(CONVERSION_GRID.length);
  const ratePerS = new Float64Array(CONVERSION_GRID.length);
  let at = 0;
  CONVERSION_GRID.forEach((alpha, k) => {
    while (cumulative[at + 1] < alpha * area) at++;
    const f = (alpha * area - cumulative[at]) / (cumulative[at + 1] - cumulative[at]);
    temperatureK[k] = T[at] + f * h + shiftK;
    ratePerS[k] = ((signal[at] + f * (signal[at + 1] - signal[at])) * rateKPerS) / area;
  });
  return {
    centroidK: moment / area + shiftK,
    peakK: peak + shiftK,
    widthK: cross(right - 1) - cross(left),
    temperatureK,
    ratePerS,
  };
}

/** The event as the fit of a sample receives it, every temperature moved by `shiftK` (scatter, correction). */
export function fitScanOf(
  exact: ExactEvent,
  where: { file: string; instrument: string; rateKPerS: number; replicate: string },
  shiftK: number,
  errorK: number,
): FitScan {
  const { file, instrument, rateKPerS, replicate } = where;
  const temperatureK = exact.temperatureK.map((T) => T + shiftK);
  const timeS = temperatureK.map((T) => (T - temperatureK[0]) / rateKPerS);
  return {
    file,
    sha256: file,
    segment: 1,
    instrument,
    replicate,
    event: {
      event: 1,
      kind: 'heating',
      rateKPerS,
      onsetK: exact.peakK + shiftK - exact.widthK,
      peakK: exact.peakK + shiftK,
      endK: exact.peakK + shiftK + exact.widthK,
      widthK: exact.widthK,
      centroidK: exact.centroidK + shiftK,
      peakErrorK: errorK,
      area: 1,
      areaError: 0.01,
      usableFrom: 0.01,
      usableTo: 0.99,
      pointsOverWidth: 100,
      noiseFraction: 0.01,
      rampStartK: temperatureK[0] - 10 * exact.widthK,
      curve: {
        timeS,
        temperatureK,
        ratePerS: exact.ratePerS,
        baselineErrorK: new Float64Array(temperatureK.length),
        programmeTimeS: Float64Array.of(timeS[0] - 1 / rateKPerS, timeS[0]),
        programmeTemperatureK: Float64Array.of(temperatureK[0] - 1, temperatureK[0]),
      },
    },
  };
}
