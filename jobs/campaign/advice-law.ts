import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { lnTimeGradient } from '../forecast/index.ts';
import { analyseBend, degreesLeft, settleBend } from '../glass/verdict/analyse.ts';
import { collectJudged, lawData } from '../glass/verdict/collect.ts';
import type { ConditionValue } from '../glass/verdict/condition.ts';
import type { LawData, LawFit } from '../glass/verdict/law-fit.ts';
import { fitSharedLaw } from '../glass/verdict/shared-law.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { createRandom } from '../numeric/random.ts';
import { standardDeviation } from '../numeric/statistics.ts';
import type { Candidate } from './advice-candidates.ts';
import type { AdviceInput } from './advice-input.ts';

/** With fewer left by the bent law its scatter, and with it every width read from it, is known to a factor of three at best. */
const LEAST_DEGREES = 2;

/** The fit whose covariance is widened by one row, with the names and scatter of its instruments. */
export interface AdviceAnalysis {
  data: LawData;
  fit: LawFit;
  /** The law with bend and lags free, from which the scatter and its degrees of freedom come */
  full: LawFit;
  /** Degrees of freedom behind each instrument's scatter */
  scatterDegrees: Float64Array;
  instruments: readonly string[];
  /** K, scatter of one scan with its own error, an instrument each */
  sigmaK: readonly number[];
  /** B = q × span */
  span: number;
}

/**
 * The fits behind a goal, made again from the scans: for the bend the law with bend and lags free, for a forecast the shared law of the verdict.
 * @returns undefined where the scans are too few for it
 */
export function analyseForAdvice({
  sample,
  event,
  scans,
  instruments,
  verdict,
}: AdviceInput): Record<'bend' | 'forecast', AdviceAnalysis> | undefined {
  const judged = collectJudged(event, scans, instruments);
  const { data, own } = lawData(judged, judged.hasCentroid ? 'centroid' : 'peak');
  if (degreesLeft(data) < LEAST_DEGREES) return undefined;
  const settled = settleBend(data, own);
  if (!settled) return undefined;
  const found = analyseBend(data, own, settled, undefined, 0);
  const sigmaK = judged.instruments.map((_, j) => {
    const errors = own.filter((__, i) => data.instrument[i] === j);
    return Math.sqrt(found.scatter.varianceK2[j] + errors.reduce((s, v) => s + v * v, 0) / errors.length);
  });
  const common = {
    data,
    full: found.full,
    scatterDegrees: found.scatter.degrees,
    instruments: judged.instruments.map((c) => c.instrument),
    sigmaK,
    span: found.span,
  };
  const shared = fitSharedLaw(sample, judged, found, verdict ?? 'undecided', undefined, createRandom(''), 0);
  return { bend: { ...common, fit: found.full }, forecast: { ...common, fit: shared.fit } };
}

/** The forecast of a time at a constant temperature as a goal: derivatives of log10 t, and the exponent's share of its variance. */
export function forecastGoal(
  { fit, data }: AdviceAnalysis,
  conversion: number,
  temperatureK: number,
  { law, lawDraws, scans, avramiExponent }: AdviceInput,
): LawGoal {
  const measured = scans.map((s) => s.event.centroidK);
  const lowestMeasuredK = law?.lowestMeasuredK ?? Math.min(...measured);
  const at: SharedLaw = {
    sample: '',
    event: 0,
    lnRateAtMiddle: fit.lnK0,
    energyJPerMol: Math.exp(fit.lnEnergy),
    bend: fit.q,
    x0PerK: data.scale.x0,
    dxPerK: data.scale.dx,
    avramiExponent: law?.avramiExponent ?? avramiExponent,
    frozenBelowK: law?.frozenBelowK ?? lowestMeasuredK,
    lowestMeasuredK,
    highestMeasuredK: law?.highestMeasuredK ?? Math.max(...measured),
  };
  const gradient = lnTimeGradient(at, temperatureK).map((v) => v / Math.LN10) as [number, number, number];
  const spread =
    lawDraws && lawDraws.avramiExponent.length > 1 ? standardDeviation(lawDraws.avramiExponent.map((n) => 1 / n)) : 0;
  return {
    gradient,
    exponentVariance: ((Math.log(-Math.log1p(-conversion)) * spread) / Math.LN10) ** 2,
    decides: 'energy',
  };
}

/** What is wanted of the law, as its derivatives by (ln K0, ln E0, q) and a variance that no further scan narrows. */
export interface LawGoal {
  gradient: readonly [number, number, number];
  /** Variance from the Avrami exponent now, and the scans behind it: it falls as one over their number */
  exponentVariance: number;
  /** Whose degrees of freedom the interval shown counts with */
  decides: 'energy' | 'bend';
}

/** Whitened derivatives of one more scan's residual, K over its scatter, and the scan's instrument. */
interface NewRow {
  row: Float64Array;
  instrument: number;
}

/**
 * The 95 % width of anything read from the shared law, from the linearised covariance of its fit (lags free or calibrated as that fit had them,
 * offsets with their priors): one more scan is one more row. Student's t is that of the interval shown: on n − p, or where the scatter of an
 * instrument rests on fewer scans on the degrees of freedom by Satterthwaite, which one more scan raises as it lowers the leverage of the others.
 */
export class LawPrecision {
  private readonly d: LawData;
  private readonly ownDegrees: Float64Array;

  constructor(private readonly analysis: AdviceAnalysis) {
    this.d = analysis.data;
    this.ownDegrees = this.ownDegreesOf(analysis.full.inverse, undefined, 0);
  }

  /** Temperature expected at a rate, K, and the whitened row of derivatives; undefined for an instrument that the fit does not have. */
  row(
    { instrument, rateKPerS }: Candidate,
    fit = this.analysis.fit,
  ): { temperatureK: number; row: Float64Array; instrument: number } | undefined {
    const j = this.analysis.instruments.indexOf(instrument);
    if (j < 0) return undefined;
    const { layout, lnK0, lnEnergy, q } = fit;
    const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
    const { scale, condition, topRate } = this.d;
    const temperatureK = condition.solve(Math.log(rateKPerS), 1 / scale.x0, lnK0, lnEnergy, q, scale, at);
    if (!(temperatureK > 0) || !Number.isFinite(at.byTemperature)) return undefined;
    const row = new Float64Array(layout.p);
    const w = 1 / this.analysis.sigmaK[j];
    const per = -w / at.byTemperature;
    row[0] = per;
    row[1] = per * at.byLogEnergy;
    if (layout.bend >= 0) row[layout.bend] = per * at.byBend;
    row[layout.offset + j] = w;
    if (layout.lag[j] >= 0) row[layout.lag[j]] = (w * rateKPerS) / topRate[j];
    if (layout.state >= 0 && j > 0) row[layout.state + j - 1] = per;
    return { temperatureK, row, instrument: j };
  }

  /** Full 95 % width of the goal, now or with `count` further scans of one kind. */
  width(goal: LawGoal, more?: Candidate, count = more ? 1 : 0): number | undefined {
    const { fit, full } = this.analysis;
    const { layout, inverse } = fit;
    const added = more && this.row(more);
    const addedFull = more && this.row(more, full);
    if (!inverse || !full.inverse || (more && !(added && addedFull))) return undefined;
    const { p } = layout;
    const degrees = this.d.n + count - p + this.d.instruments;
    if (degrees < 1) return undefined;
    const covariance = withRows(inverse, added?.row, p, count);
    const gradient = new Float64Array(p);
    gradient[0] = goal.gradient[0];
    gradient[1] = goal.gradient[1];
    if (layout.bend >= 0) gradient[layout.bend] = goal.gradient[2];
    const variance = form(covariance, gradient, 0, p);
    const exponent = (goal.exponentVariance * this.d.n) / (this.d.n + count);
    const own = this.ownDegreesOf(withRows(full.inverse, addedFull?.row, full.layout.p, count), addedFull, count);
    const effective = this.effectiveDegrees(goal.decides === 'bend' ? layout.bend : 1, covariance, own, added, count);
    const t = studentQuantile(0.975, degrees);
    const lawT = effective < degrees ? studentQuantile(0.975, effective) : t;
    return 2 * Math.sqrt(lawT ** 2 * variance + t ** 2 * exponent);
  }

  /** Σ(1 − leverage) of each instrument's scans under the law with bend and lags free. */
  private ownDegreesOf(covariance: Float64Array | undefined, added: NewRow | undefined, count: number): Float64Array {
    const out = new Float64Array(this.d.instruments);
    const { jacobian, layout } = this.analysis.full;
    if (!covariance) return out;
    const { p } = layout;
    for (let i = 0; i < this.d.n; i++) out[this.d.instrument[i]] += 1 - form(covariance, jacobian, i, p);
    if (added) out[added.instrument] += count * (1 - form(covariance, added.row, 0, p));
    return out;
  }

  /** Satterthwaite's degrees of freedom of one parameter: each instrument's share of its variance counts with its scatter's, priors as known. */
  private effectiveDegrees(
    at: number,
    covariance: Float64Array,
    own: Float64Array,
    added: NewRow | undefined,
    count: number,
  ): number {
    const { jacobian, layout } = this.analysis.fit;
    const { p, rows } = layout;
    const shares = new Float64Array(this.d.instruments);
    let total = 0;
    const take = (J: Float64Array, k: number, instrument: number, times: number) => {
      let c = 0;
      for (let b = 0; b < p; b++) c += covariance[at * p + b] * J[k * p + b];
      total += times * c * c;
      if (instrument >= 0) shares[instrument] += times * c * c;
    };
    for (let k = 0; k < rows; k++) take(jacobian, k, k < this.d.n ? this.d.instrument[k] : -1, 1);
    if (added) take(added.row, 0, added.instrument, count);
    let sum = 0;
    for (let j = 0; j < shares.length; j++)
      sum += shares[j] ** 2 / (this.analysis.scatterDegrees[j] + own[j] - this.ownDegrees[j]);
    return Math.max(1, Math.min(1e4, (total * total) / sum));
  }
}

/** vᵀ C v for row k of v. */
function form(covariance: Float64Array, v: Float64Array, k: number, p: number): number {
  let sum = 0;
  for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) sum += v[k * p + a] * covariance[a * p + b] * v[k * p + b];
  return sum;
}

/** C − m C v vᵀ C/(1 + m vᵀ C v): the covariance with m more whitened rows v (Sherman & Morrison 1950). */
function withRows(covariance: Float64Array, v: Float64Array | undefined, p: number, m: number): Float64Array {
  const out = covariance.slice();
  if (!v) return out;
  const moved = new Float64Array(p);
  let scale = 0;
  for (let a = 0; a < p; a++) {
    for (let b = 0; b < p; b++) moved[a] += covariance[a * p + b] * v[b];
    scale += v[a] * moved[a];
  }
  const part = m / (1 + m * scale);
  for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) out[a * p + b] -= part * moved[a] * moved[b];
  return out;
}
