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

/** The fit whose covariance is widened by one row, with the names and scatter of its instruments. */
export interface AdviceAnalysis {
  data: LawData;
  fit: LawFit;
  instruments: readonly string[];
  /** K, scatter of one scan with its own error, an instrument each */
  sigmaK: readonly number[];
  /** B = q × span */
  span: number;
}

/**
 * The fit behind a goal, made again from the scans: for the bend the law with bend and lags free, for a forecast the shared law of the verdict.
 * @returns undefined where the scans are too few for it
 */
export function analyseForAdvice(
  { sample, event, scans, instruments, verdict }: AdviceInput,
  goal: 'bend' | 'forecast',
): AdviceAnalysis | undefined {
  const judged = collectJudged(event, scans, instruments);
  const { data, own } = lawData(judged, judged.hasCentroid ? 'centroid' : 'peak');
  if (degreesLeft(data) < 1) return undefined;
  const settled = settleBend(data, own);
  if (!settled) return undefined;
  const found = analyseBend(data, own, settled, undefined, 0);
  const fit =
    goal === 'bend'
      ? found.full
      : fitSharedLaw(sample, judged, found, verdict ?? 'undecided', undefined, createRandom(''), 0).fit;
  const sigmaK = judged.instruments.map((_, j) => {
    const errors = own.filter((__, i) => data.instrument[i] === j);
    return Math.sqrt(found.scatter.varianceK2[j] + errors.reduce((s, v) => s + v * v, 0) / errors.length);
  });
  return { data, fit, instruments: judged.instruments.map((c) => c.instrument), sigmaK, span: found.span };
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
  return { gradient, exponentVariance: ((Math.log(-Math.log1p(-conversion)) * spread) / Math.LN10) ** 2 };
}

/** What is wanted of the law, as its derivatives by (ln K0, ln E0, q) and a variance that no further scan narrows. */
export interface LawGoal {
  gradient: readonly [number, number, number];
  /** Variance from the Avrami exponent now, and the scans behind it: it falls as one over their number */
  exponentVariance: number;
}

/**
 * The 95 % width of anything read from the shared law, from the linearised covariance of its fit (lags free or calibrated as that fit had them,
 * offsets with their priors): one more scan is one more row.
 */
export class LawPrecision {
  private readonly d: LawData;
  private readonly fit: LawFit;

  constructor(private readonly analysis: AdviceAnalysis) {
    this.d = analysis.data;
    this.fit = analysis.fit;
  }

  /** Temperature expected at a rate, K, and the whitened row of derivatives; undefined for an instrument that the fit does not have. */
  row({ instrument, rateKPerS }: Candidate): { temperatureK: number; row: Float64Array } | undefined {
    const j = this.analysis.instruments.indexOf(instrument);
    if (j < 0) return undefined;
    const { layout, lnK0, lnEnergy, q } = this.fit;
    const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
    const temperatureK = this.d.condition.solve(
      Math.log(rateKPerS),
      1 / this.d.scale.x0,
      lnK0,
      lnEnergy,
      q,
      this.d.scale,
      at,
    );
    if (!(temperatureK > 0) || !Number.isFinite(at.byTemperature)) return undefined;
    const row = new Float64Array(layout.p);
    const w = 1 / this.analysis.sigmaK[j];
    const per = -w / at.byTemperature;
    row[0] = per;
    row[1] = per * at.byLogEnergy;
    if (layout.bend >= 0) row[layout.bend] = per * at.byBend;
    row[layout.offset + j] = w;
    if (layout.lag[j] >= 0) row[layout.lag[j]] = (w * rateKPerS) / this.d.topRate[j];
    if (layout.state >= 0 && j > 0) row[layout.state + j - 1] = per;
    return { temperatureK, row };
  }

  /** Full 95 % width of the goal with these further scans. */
  width(goal: LawGoal, more: readonly Candidate[] = []): number | undefined {
    const { inverse, layout } = this.fit;
    if (!inverse) return undefined;
    const { p } = layout;
    const covariance = inverse.slice();
    for (const candidate of more) {
      const found = this.row(candidate);
      if (!found) return undefined;
      addRow(covariance, found.row, p);
    }
    const gradient = new Float64Array(p);
    gradient[0] = goal.gradient[0];
    gradient[1] = goal.gradient[1];
    if (layout.bend >= 0) gradient[layout.bend] = goal.gradient[2];
    let variance = (goal.exponentVariance * this.d.n) / (this.d.n + more.length);
    for (let a = 0; a < p; a++)
      for (let b = 0; b < p; b++) variance += gradient[a] * covariance[a * p + b] * gradient[b];
    const degrees = this.d.n + more.length - p + this.d.instruments;
    return degrees < 1 ? undefined : 2 * studentQuantile(0.975, degrees) * Math.sqrt(variance);
  }
}

/** C − C v vᵀ C/(1 + vᵀ C v), in place: the covariance with one more whitened row v (Sherman & Morrison 1950). */
function addRow(covariance: Float64Array, v: Float64Array, p: number): void {
  const moved = new Float64Array(p);
  let scale = 1;
  for (let a = 0; a < p; a++) {
    for (let b = 0; b < p; b++) moved[a] += covariance[a * p + b] * v[b];
    scale += v[a] * moved[a];
  }
  for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) covariance[a * p + b] -= (moved[a] * moved[b]) / scale;
}
