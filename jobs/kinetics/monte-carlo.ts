import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Random } from '../numeric/random.ts';
import type { DrawCauses } from './draw-spread.ts';
import { CONVERSION_COUNT, type EventColumns, type EventData, emptyColumns, POOLED } from './event-data.ts';
import { fitLogTrend, fitRateTrend, fitTemperatureTrend, type Trend } from './trend.ts';

/**
 * The scatter between scans, split into a trend with heating rate and one whole residual curve a scan: one scan's curve moves together, so
 * the scan is the unit of resampling (METHODS 11).
 */
export interface ScatterModel {
  data: EventData;
  bent: boolean;
  /** parameters of the trend: 2 straight, 3 bent */
  trendParameters: number;
  weights: Float64Array;
  /** K, scatter of T between scans, per instrument of the event */
  sigmaK: Float64Array;
  peak: Trend;
  width: Trend;
  /** per conversion, over the curve scans */
  temperature: Trend[];
  lnRate: Trend[];
  curves: Uint16Array;
}

/** The bent trend needs this many distinct rates over this span to be told from scatter. */
const BENT_FROM_RATES = 4;
const BENT_FROM_SPAN = 10;
/** Scatter below this is rounding, K: keeps weights finite on noise-free data. */
const LEAST_SIGMA_K = 1e-4;
/** α = 0.5, where a scan's shift is read. */
const MIDDLE = 9;
/** An instrument's own scatter is shrunk towards that of all by this many scans' worth. */
const SHRINK_SCANS = 1;

/** @param distinct number of distinct rates */
export function modelScatter(data: EventData, curves: Uint16Array, distinct: number): ScatterModel {
  const n = data.n;
  const span = Math.max(...data.rate) / Math.min(...data.rate);
  const bent = distinct >= BENT_FROM_RATES && span >= BENT_FROM_SPAN && n >= 5;
  const trendParameters = bent ? 3 : 2;
  // Too few of the scans may have curves to bear the bent trend that the peaks bear.
  const bentCurves = bent && curves.length >= 5;
  const hasTrend = curves.length > 2;
  let weights: Float64Array = new Float64Array(n).fill(1);
  let sigmaK: Float64Array = new Float64Array(data.instruments.length);
  const pick = (from: Float64Array, k: number) => Float64Array.from(curves, (i) => from[i * CONVERSION_COUNT + k]);
  const some = <A extends ArrayLike<number>>(a: A) => Float64Array.from(curves, (i) => a[i]);
  // Weights follow from the scatter about a trend that is fitted with them: a few rounds settle that.
  for (let round = 0; round < (data.instruments.length > 1 ? 4 : 1); round++) {
    const peak = fitTemperatureTrend(data.rate, data.peakK, weights, bent);
    const curve = hasTrend
      ? [POOLED.from, MIDDLE, POOLED.to - 1].map((k) =>
          fitTemperatureTrend(some(data.rate), pick(data.temperatureK, k), some(weights), bentCurves),
        )
      : [];
    sigmaK = instrumentScatter(data, [peak, ...curve], curves);
    if (data.instruments.length > 1) weights = Float64Array.from(data.instrument, (at) => 1 / sigmaK[at] ** 2);
  }
  const mean = weights.reduce((s, w) => s + w, 0) / n;
  weights = weights.map((w) => w / mean);
  const rate = some(data.rate);
  const w = some(weights);
  const temperature: Trend[] = [];
  const lnRate: Trend[] = [];
  for (let k = 0; k < CONVERSION_COUNT && hasTrend; k++) {
    const T = fitTemperatureTrend(rate, pick(data.temperatureK, k), w, bentCurves);
    temperature.push(T);
    lnRate.push(fitRateTrend(rate, T.fitted, pick(data.lnRate, k), w, bentCurves));
  }
  return {
    data,
    bent,
    trendParameters,
    weights,
    sigmaK,
    peak: fitTemperatureTrend(data.rate, data.peakK, weights, bent),
    width: fitLogTrend(data.rate, data.widthK, weights),
    temperature,
    lnRate,
    curves,
  };
}

/** Root mean square of residual/√(1 − h) per instrument over the trends given; the first covers all scans, the others the curve scans. */
function instrumentScatter(data: EventData, trends: Trend[], curves: Uint16Array): Float64Array {
  const count = data.instruments.length;
  const sums = new Float64Array(count);
  const scans = new Float64Array(count);
  trends.forEach((t, which) => {
    t.residuals.forEach((r, j) => {
      const at = data.instrument[which === 0 ? j : curves[j]];
      sums[at] += (r * r) / (1 - t.leverage[j]) / trends.length;
      scans[at] += 1 / trends.length;
    });
  });
  const pooled = sums.reduce((s, v) => s + v, 0) / scans.reduce((s, v) => s + v, 0);
  return sums.map((s, at) =>
    Math.max(LEAST_SIGMA_K, Math.sqrt((s + SHRINK_SCANS * pooled) / (scans[at] + SHRINK_SCANS))),
  );
}

/**
 * One draw into `out`: shared calibration errors per instrument, a whole residual curve per scan (standardised by its own instrument's
 * scatter and leverage, scaled by the target's), and of the scan's baseline share what the scatter between scans does not hold already
 * (counting it twice gave 98 % coverage where noise was all there was).
 * @returns what was drawn, for the split of the variance
 */
export function drawColumns(model: ScatterModel, random: Random, out: EventColumns): DrawCauses {
  const { data, curves } = model;
  const calibration = data.instruments.map((c) => drawCalibration(c, random));
  const curveOf = new Int32Array(data.n).fill(-1);
  curves.forEach((i, j) => {
    curveOf[i] = j;
  });
  const shifts = new Float64Array(data.n);
  for (let i = 0; i < data.n; i++) {
    let from = random.integer(data.n);
    if (curveOf[i] >= 0) while (curveOf[from] < 0) from = random.integer(data.n);
    const at = data.instrument[i];
    const scale = model.sigmaK[at] / model.sigmaK[data.instrument[from]];
    const shift = calibration[at].offset + calibration[at].lag * data.rate[i];
    const baseline = random.normal();
    const lift = (h: number) => scale / Math.sqrt(1 - h);
    out.peakK[i] = model.peak.fitted[i] + lift(model.peak.leverage[from]) * model.peak.residuals[from] - shift;
    out.widthK[i] = Math.exp(
      model.width.fitted[i] + (model.width.residuals[from] * lift(model.width.leverage[from])) / scale,
    );
    const j = curveOf[i];
    const f = curveOf[from];
    shifts[i] = out.peakK[i] + shift - model.peak.fitted[i];
    if (j < 0 || model.temperature.length === 0) continue;
    const middle = model.temperature[MIDDLE];
    shifts[i] = lift(middle.leverage[f]) * middle.residuals[f];
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const T = model.temperature[k];
      const r = model.lnRate[k];
      const cell = i * CONVERSION_COUNT + k;
      const extra = Math.sqrt(Math.max(0, data.baselineErrorK[cell] ** 2 - model.sigmaK[at] ** 2));
      const drawn = T.fitted[j] + lift(T.leverage[f]) * T.residuals[f] + baseline * extra - shift;
      // A large baseline share may not turn the curve back on itself.
      out.temperatureK[cell] = k === 0 ? drawn : Math.max(drawn, out.temperatureK[cell - 1] + LEAST_SIGMA_K);
      out.lnRate[cell] = r.fitted[j] + lift(r.leverage[f]) * r.residuals[f];
    }
  }
  return { calibration: Float64Array.from(calibration.flatMap((c) => [c.offset, c.lag])), shifts };
}

/** Errors of offset and lag; an instrument without standards or sheet values has a lag of unknown size that can only be positive. */
export function drawCalibration(c: InstrumentCalibration, random: Random): { offset: number; lag: number } {
  const lag = random.normal() * c.lagSeS;
  return { offset: random.normal() * c.offsetSeK, lag: c.source === 'prior' ? Math.abs(lag) : lag };
}

/** Columns for draws of this event, with all that no draw changes already in place. */
export function drawBuffer(data: EventData): EventColumns {
  const columns = emptyColumns(data.n);
  columns.rate.set(data.rate);
  columns.rampStartK.set(data.rampStartK);
  columns.hasCurve.set(data.hasCurve);
  return columns;
}

/** Degrees of freedom behind the scatter of each scan's instrument: its share of n − p, and what the shrinkage adds. */
export function scanDegrees(model: ScatterModel): number[] {
  const { data } = model;
  const whole = Math.max(1, data.n - model.trendParameters);
  if (data.instruments.length < 2) return new Array<number>(data.n).fill(whole);
  const count = new Array<number>(data.instruments.length).fill(0);
  for (const at of data.instrument) count[at]++;
  return Array.from(data.instrument, (at) => Math.min(whole, (count[at] * whole) / data.n + SHRINK_SCANS));
}
