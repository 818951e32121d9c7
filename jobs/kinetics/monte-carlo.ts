import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import type { Random } from '../numeric/random.ts';
import type { DrawCauses } from './draw-spread.ts';
import {
  CONVERSION_COUNT,
  type EventColumns,
  type EventData,
  emptyColumns,
  POOLED,
  usableWeights,
} from './event-data.ts';
import { fitLogTrend, fitRateTrend, fitTemperatureTrend, type Trend } from './trend.ts';

/** The scatter between scans about a trend with heating rate. */
export interface Scatter {
  data: EventData;
  bent: boolean;
  /** parameters of the trend: 2 straight, 3 bent */
  trendParameters: number;
  weights: Float64Array;
  /** K, scatter of T between scans, per instrument of the event */
  sigmaK: Float64Array;
  /** degrees of freedom behind each */
  scatterDegrees: Float64Array;
  peak: Trend;
}

/** With one whole residual curve a scan: one scan's curve moves together, so the scan is the unit of resampling. */
export interface ScatterModel extends Scatter {
  width: Trend;
  /** per conversion, over the curve scans */
  temperature: Trend[];
  lnRate: Trend[];
  curves: Uint16Array;
  parts: DrawParts;
}

/** What every draw is put together from. Residuals are divided by √(1 − leverage). */
interface DrawParts {
  /** K, and ln FWHM: one a scan */
  peak: Float64Array;
  width: Float64Array;
  /** place of each scan among the curve scans, −1 without a curve */
  curveOf: Int32Array;
  /** scan-major over the curve scans; empty without a trend */
  fittedK: Float64Array;
  residualK: Float64Array;
  fittedLnRate: Float64Array;
  residualLnRate: Float64Array;
  /** K, the part of a point's baseline error that the scatter between scans does not hold already */
  baselineK: Float64Array;
}

/** The bent trend needs this many distinct rates over this span to be told from scatter. */
const BENT_FROM_RATES = 4;
const BENT_FROM_SPAN = 10;
/** Scatter below this is rounding, K: keeps weights finite on noise-free data. */
const LEAST_SIGMA_K = 1e-4;
/** α = 0.5, where a scan's shift is read. */
const MIDDLE = 9;
/**
 * Scatter of an instrument with fewer than two degrees of freedom of its own cannot be read off its scans (two chip scans at the far end
 * of the rates define the trend there): what is missing to two is filled up with that of all scans, and at least this much, K
 * (about what mounting costs on a furnace and a membrane; common practice, no source).
 */
const OWN_DEGREES = 2;
const LEAST_PRIOR_K = { furnace: 0.2, chip: 1 } as const;

/**
 * The trend is bent where the data can bear it and ask for it: left in where it is not seen, two scans of a second instrument at the far
 * end define it alone and hide their own scatter (88 % coverage).
 * @param distinct number of distinct rates
 */
export function findScatter(data: EventData, curves: Uint16Array, distinct: number): Scatter {
  const span = Math.max(...data.rate) / Math.min(...data.rate);
  const bearable = distinct >= BENT_FROM_RATES && span >= BENT_FROM_SPAN && data.n >= 5;
  if (!bearable) return scatterAbout(data, curves, false);
  const bent = scatterAbout(data, curves, true);
  const straight = fitTemperatureTrend(data.rate, data.peakK, bent.weights, false);
  const sum = (t: Trend) => t.residuals.reduce((total, r, i) => total + bent.weights[i] * r * r, 0);
  const gained = sum(straight) - sum(bent.peak);
  const degrees = data.n - 3;
  const seen = gained > (studentQuantile(0.975, degrees) ** 2 * sum(bent.peak)) / degrees;
  return seen ? bent : scatterAbout(data, curves, false);
}

/** Too few of the scans may have curves to bear the bent trend that the peaks bear. */
const bearsBend = (curves: Uint16Array): boolean => curves.length >= 5;
const hasTrend = (curves: Uint16Array): boolean => curves.length > 2;

const ofCurves = (values: ArrayLike<number>, curves: Uint16Array): Float64Array =>
  Float64Array.from(curves, (i) => values[i]);
const atConversion = (columns: Float64Array, curves: Uint16Array, k: number): Float64Array =>
  Float64Array.from(curves, (i) => columns[i * CONVERSION_COUNT + k]);

function scatterAbout(data: EventData, curves: Uint16Array, bent: boolean): Scatter {
  const n = data.n;
  let weights: Float64Array = new Float64Array(n).fill(1);
  let scatter = { sigmaK: new Float64Array(0), degrees: new Float64Array(0) };
  const rate = ofCurves(data.rate, curves);
  const bentCurves = bent && bearsBend(curves);
  // Weights follow from the scatter about a trend that is fitted with them: a few rounds settle that.
  for (let round = 0; round < (data.instruments.length > 1 ? 6 : 1); round++) {
    const peak = fitTemperatureTrend(data.rate, data.peakK, weights, bent);
    const w = ofCurves(weights, curves);
    const curve = hasTrend(curves)
      ? [POOLED.from, MIDDLE, POOLED.to - 1].map((k) =>
          fitTemperatureTrend(rate, atConversion(data.temperatureK, curves, k), w, bentCurves),
        )
      : [];
    scatter = instrumentScatter(data, [peak, ...curve], curves);
    if (data.instruments.length > 1) weights = Float64Array.from(data.instrument, (at) => 1 / scatter.sigmaK[at] ** 2);
  }
  const mean = weights.reduce((s, w) => s + w, 0) / n;
  weights = weights.map((w) => w / mean);
  return {
    data,
    bent,
    trendParameters: bent ? 3 : 2,
    weights,
    sigmaK: scatter.sigmaK,
    scatterDegrees: scatter.degrees,
    peak: fitTemperatureTrend(data.rate, data.peakK, weights, bent),
  };
}

/** What the draws of an event are made from. */
export function modelScatter(data: EventData, curves: Uint16Array, distinct: number): ScatterModel {
  const scatter = findScatter(data, curves, distinct);
  const rate = ofCurves(data.rate, curves);
  const bent = scatter.bent && bearsBend(curves);
  const temperature: Trend[] = [];
  const lnRate: Trend[] = [];
  const usable = usableWeights(data, curves, ofCurves(scatter.weights, curves), data.usable).at;
  for (let k = 0; k < CONVERSION_COUNT && hasTrend(curves); k++) {
    const T = fitTemperatureTrend(rate, atConversion(data.temperatureK, curves, k), usable[k], bent);
    temperature.push(T);
    lnRate.push(fitRateTrend(rate, T.fitted, atConversion(data.lnRate, curves, k), usable[k], bent));
  }
  for (const trends of [temperature, lnRate]) fillUnusable(trends, data.usable, curves);
  const model = {
    width: fitLogTrend(data.rate, data.widthK, scatter.weights),
    temperature,
    lnRate,
    curves,
    ...scatter,
  };
  return { parts: drawParts(model), ...model };
}

function drawParts({ data, sigmaK, peak, width, temperature, lnRate, curves }: Omit<ScatterModel, 'parts'>): DrawParts {
  const lifted = (t: Trend) => t.residuals.map((r, i) => r / Math.sqrt(1 - t.leverage[i]));
  const scanMajor = (columns: Float64Array[]) =>
    Float64Array.from({ length: columns.length * curves.length }, (_, cell) => {
      const j = Math.floor(cell / CONVERSION_COUNT);
      return columns[cell - j * CONVERSION_COUNT][j];
    });
  const curveOf = new Int32Array(data.n).fill(-1);
  curves.forEach((i, j) => {
    curveOf[i] = j;
  });
  return {
    peak: lifted(peak),
    width: lifted(width),
    curveOf,
    fittedK: scanMajor(temperature.map((t) => t.fitted)),
    residualK: scanMajor(temperature.map(lifted)),
    fittedLnRate: scanMajor(lnRate.map((t) => t.fitted)),
    residualLnRate: scanMajor(lnRate.map(lifted)),
    baselineK: data.baselineErrorK.map((error, cell) => {
      const sigma = sigmaK[data.instrument[Math.floor(cell / CONVERSION_COUNT)]];
      return Math.sqrt(Math.max(0, error * error - sigma * sigma));
    }),
  };
}

/** Where a scan is not usable its residual says nothing of scatter: that of its nearest usable conversion stands there. */
function fillUnusable(trends: Trend[], usable: Uint8Array, curves: Uint16Array): void {
  for (let j = 0; j < curves.length; j++) {
    const at = curves[j] * CONVERSION_COUNT;
    for (let k = 0; k < trends.length; k++) {
      if (usable[at + k]) continue;
      for (let away = 1; away < CONVERSION_COUNT; away++) {
        const near = usable[at + k - away] && k >= away ? k - away : k + away;
        if (near >= CONVERSION_COUNT || !usable[at + near]) continue;
        trends[k].residuals[j] = trends[near].residuals[j];
        trends[k].leverage[j] = trends[near].leverage[j];
        break;
      }
    }
  }
}

/**
 * Scatter of each instrument, σ² = Σ r²/Σ (1 − h) over its scans (restricted maximum likelihood's fixed point), with the degrees of freedom
 * behind it. The first trend covers all scans, the others the curve scans.
 */
function instrumentScatter(
  data: EventData,
  trends: Trend[],
  curves: Uint16Array,
): { sigmaK: Float64Array<ArrayBuffer>; degrees: Float64Array<ArrayBuffer> } {
  const count = data.instruments.length;
  const squares = new Float64Array(count);
  const degrees = new Float64Array(count);
  trends.forEach((t, which) => {
    t.residuals.forEach((r, j) => {
      const at = data.instrument[which === 0 ? j : curves[j]];
      squares[at] += (r * r) / trends.length;
      degrees[at] += (1 - t.leverage[j]) / trends.length;
    });
  });
  const all = (v: Float64Array) => v.reduce((s, x) => s + x, 0);
  const pooled = all(squares) / Math.max(1e-9, all(degrees));
  const sigmaK = new Float64Array(count);
  for (let at = 0; at < count; at++) {
    const missing = count > 1 ? Math.max(0, OWN_DEGREES - degrees[at]) : 0;
    const prior = Math.max(pooled, LEAST_PRIOR_K[data.instruments[at].kind] ** 2);
    degrees[at] += missing;
    sigmaK[at] = Math.max(LEAST_SIGMA_K, Math.sqrt((squares[at] + missing * prior) / Math.max(1e-9, degrees[at])));
  }
  return { sigmaK, degrees };
}

/**
 * One draw into `out`: shared calibration errors per instrument, a whole residual curve per scan (standardised by its own instrument's
 * scatter and leverage, scaled by the target's), and of the scan's baseline share what the scatter between scans does not hold already
 * (counting it twice gave 98 % coverage where noise was all there was).
 * @returns what was drawn, for the split of the variance
 */
export function drawColumns(model: ScatterModel, random: Random, out: EventColumns): DrawCauses {
  const { data, parts, sigmaK } = model;
  const { curveOf, fittedK, residualK, fittedLnRate, residualLnRate, baselineK } = parts;
  const calibration: number[] = [];
  for (const c of data.instruments) {
    const { offset, lag } = drawCalibration(c, random);
    calibration.push(offset, lag);
  }
  const shifts: number[] = [];
  for (let i = 0; i < data.n; i++) {
    let from = random.integer(data.n);
    if (curveOf[i] >= 0) while (curveOf[from] < 0) from = random.integer(data.n);
    const at = data.instrument[i];
    const scale = sigmaK[at] / sigmaK[data.instrument[from]];
    const shift = calibration[2 * at] + calibration[2 * at + 1] * data.rate[i];
    const baseline = random.normal();
    out.peakK[i] = model.peak.fitted[i] + scale * parts.peak[from] - shift;
    out.widthK[i] = Math.exp(model.width.fitted[i] + parts.width[from]);
    if (curveOf[i] < 0 || fittedK.length === 0) {
      shifts.push(out.peakK[i] + shift - model.peak.fitted[i]);
      continue;
    }
    const own = curveOf[i] * CONVERSION_COUNT;
    const other = curveOf[from] * CONVERSION_COUNT;
    shifts.push(scale * residualK[other + MIDDLE]);
    // A large baseline share may not turn the curve back on itself.
    let least = Number.NEGATIVE_INFINITY;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const cell = i * CONVERSION_COUNT + k;
      const drawn = fittedK[own + k] + scale * residualK[other + k] + baseline * baselineK[cell] - shift;
      const kept = Math.max(drawn, least);
      out.temperatureK[cell] = kept;
      least = kept + LEAST_SIGMA_K;
      out.lnRate[cell] = fittedLnRate[own + k] + scale * residualLnRate[other + k];
    }
  }
  return { calibration, shifts };
}

/** A scatter estimated from few scans may come out small by chance, not nothing. */
const LEAST_VARIANCE_RATIO = 0.02;

/** Weights and scatter that a draw works with: those of all scans, and of the curve scans. */
export interface DrawnWeights {
  weights: Float64Array;
  curveWeights: Float64Array;
  curveSigmaK: Float64Array;
}

/**
 * Weights that this draw would have been given: each instrument's scatter is an estimate with ν degrees of freedom, so that σ̂²/σ² goes as
 * χ²/ν (Wilson & Hilferty 1931, PNAS 17:684). With fixed weights the intervals of two instruments with few scans each were too narrow
 * (92 %; the effect is that of Kackar & Harville 1984, J. Am. Stat. Assoc. 79:853). With one instrument nothing changes.
 */
export function drawWeights(model: ScatterModel, random: Random, out: DrawnWeights): void {
  const { data, scatterDegrees, curves, weights, sigmaK } = model;
  if (data.instruments.length < 2) return;
  const ratio: number[] = [];
  for (let at = 0; at < scatterDegrees.length; at++) {
    const part = 2 / (9 * Math.max(1, scatterDegrees[at]));
    ratio.push(Math.max(LEAST_VARIANCE_RATIO, (1 - part + random.normal() * Math.sqrt(part)) ** 3));
  }
  for (let i = 0; i < data.n; i++) out.weights[i] = weights[i] / ratio[data.instrument[i]];
  for (let j = 0; j < curves.length; j++) {
    const at = data.instrument[curves[j]];
    out.curveWeights[j] = out.weights[curves[j]];
    out.curveSigmaK[j] = sigmaK[at] * Math.sqrt(ratio[at]);
  }
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

/** Degrees of freedom behind the scatter of each scan's instrument, at most n − p. */
export function scanDegrees(model: ScatterModel): number[] {
  const { data, scatterDegrees } = model;
  const whole = Math.max(1, data.n - model.trendParameters);
  if (data.instruments.length < 2) return new Array<number>(data.n).fill(whole);
  return Array.from(data.instrument, (at) => Math.min(whole, scatterDegrees[at]));
}
