import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { lnTimeGradient } from '../forecast/index.ts';
import { analyseBend, type BendAnalysis, degreesLeft, settleBend } from '../glass/verdict/analyse.ts';
import { believeBend } from '../glass/verdict/bend-belief.ts';
import { collectJudged, lawData } from '../glass/verdict/collect.ts';
import type { ConditionValue } from '../glass/verdict/condition.ts';
import type { LawData, LawFit, Layout } from '../glass/verdict/law-fit.ts';
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
  law: SharedLaw;
  /** Where the fit holds its bend: what else the bend may be, from the same law with the bend free */
  open?: { bent: LawFit; centred: boolean };
  /** The verdict's analysis: the law with bend and lags free, from which the scatter and its degrees of freedom come */
  bend: BendAnalysis;
  instruments: readonly string[];
  /** K, scatter of one scan with its own error, an instrument each */
  sigmaK: readonly number[];
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
  verdict = 'undecided',
  law,
}: AdviceInput): Record<'bend' | 'forecast', AdviceAnalysis> | undefined {
  const judged = collectJudged(event, scans, instruments);
  const { data, own } = lawData(judged, judged.hasCentroid ? 'centroid' : 'peak');
  if (degreesLeft(data) < LEAST_DEGREES) return undefined;
  const settled = settleBend(data, own);
  if (!settled) return undefined;
  const bend = analyseBend(data, own, settled, undefined, 0);
  const sigmaK = judged.instruments.map((_, j) => {
    const errors = own.filter((__, i) => data.instrument[i] === j);
    return Math.sqrt(bend.scatter.varianceK2[j] + errors.reduce((s, v) => s + v * v, 0) / errors.length);
  });
  const shared = fitSharedLaw(sample, judged, bend, verdict, undefined, createRandom(''), 0, law?.driving);
  const common = { bend, law: shared.law, instruments: judged.instruments.map((c) => c.instrument), sigmaK };
  const held = shared.fit.layout.bend < 0;
  return {
    bend: { ...common, data, fit: bend.full },
    forecast: {
      ...common,
      data: shared.data,
      fit: shared.fit,
      ...(held && { open: { bent: shared.bent, centred: verdict === 'undecided' } }),
    },
  };
}

/** The forecast of a time at a constant temperature as a goal: derivatives of log10 t, and the exponent's share of its variance. */
export function forecastGoal(
  { law: made, fit }: AdviceAnalysis,
  conversion: number,
  temperatureK: number,
  { law, lawDraws }: AdviceInput,
): LawGoal {
  const at: SharedLaw = {
    ...made,
    ...(law && { avramiExponent: law.avramiExponent, frozenBelowK: law.frozenBelowK }),
    bend: fit.q,
  };
  const gradientAt = (frozenBelowK: number) =>
    lnTimeGradient({ ...at, frozenBelowK }, temperatureK).map((v) => v / Math.LN10) as [number, number, number];
  const spread =
    lawDraws && lawDraws.avramiExponent.length > 1 ? standardDeviation(lawDraws.avramiExponent.map((n) => 1 / n)) : 0;
  const exponentVariance = ((Math.log(-Math.log1p(-conversion)) * spread) / Math.LN10) ** 2;
  const ends = [made.lowestMeasuredK, made.highestMeasuredK].map((T) => (1 / T - made.x0PerK) / made.dxPerK);
  // Whichever of the local energies at both ends has the fewest degrees of freedom sets the t of the draws.
  const decides = fit.layout.bend >= 0 ? ends.map((u) => [0, 1, u] as const) : [[0, 1, 0] as const];
  return {
    gradient: gradientAt(at.frozenBelowK),
    frozen: { belowK: at.frozenBelowK, gradientAt },
    exponentVariance,
    decides,
  };
}

/** What is wanted of the law, as its derivatives by (ln K0, ln E0, q) and a variance that no further scan narrows. */
export interface LawGoal {
  gradient: readonly [number, number, number];
  /** A scan whose event lies below the frozen point takes that point along, and with it what the bend may do below the others */
  frozen?: { belowK: number; gradientAt(frozenBelowK: number): readonly [number, number, number] };
  /** Variance from the Avrami exponent now, and the scans behind it: it falls as one over their number */
  exponentVariance: number;
  /** Combinations of (ln K0, ln E0, q) of which the one with the fewest degrees of freedom sets Student's t of the interval shown */
  decides: readonly (readonly [number, number, number])[];
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
    this.ownDegrees = this.ownDegreesOf(analysis.bend.full.inverse, undefined, 0);
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
    const { fit, bend, open } = this.analysis;
    const { layout, inverse } = fit;
    const { p } = layout;
    const added = more && this.row(more);
    const addedFull = more && this.row(more, bend.full);
    const degrees = this.d.n + count - p + this.d.instruments;
    if (!inverse || !bend.full.inverse || (more && !(added && addedFull)) || degrees < 1) return undefined;
    const covariance = withRows(inverse, added?.row, p, count);
    const lower = added && goal.frozen && added.temperatureK < goal.frozen.belowK;
    const gradient = lower ? goal.frozen!.gradientAt(added.temperatureK) : goal.gradient;
    const openVariance = open ? this.openVariance(gradient, open, more, count) : 0;
    if (openVariance === undefined) return undefined;
    const variance = form(covariance, spread(gradient, layout), 0, p) + openVariance;
    const exponent = (goal.exponentVariance * this.d.n) / (this.d.n + count);
    const own = this.ownDegreesOf(
      withRows(bend.full.inverse, addedFull?.row, bend.full.layout.p, count),
      addedFull,
      count,
    );
    let effective = degrees;
    for (const of of goal.decides)
      effective = Math.min(effective, this.effectiveDegrees(spread(of, layout), covariance, own, added, count));
    const t = studentQuantile(0.975, degrees);
    const lawT = effective < degrees ? studentQuantile(0.975, effective) : t;
    return 2 * Math.sqrt(lawT ** 2 * variance + t ** 2 * exponent);
  }

  /**
   * What the bend left open adds to the variance of the goal: with the bend moved, ln K0 and E0 follow along Σ_q/Σ_qq of the law with
   * its bend free. A further scan tells more of the bend, by as much as its variance there falls.
   */
  private openVariance(
    gradient: LawGoal['gradient'],
    { bent, centred }: NonNullable<AdviceAnalysis['open']>,
    more: Candidate | undefined,
    count: number,
  ): number | undefined {
    const { p, bend: q } = bent.layout;
    const added = more && this.row(more, bent);
    if (!bent.inverse || (more && !added)) return undefined;
    const inverse = withRows(bent.inverse, added?.row, p, count);
    const { mean, meanSquare } = believeBend(this.analysis.bend, { ...bent, inverse });
    let along = 0;
    spread(gradient, bent.layout).forEach((g, a) => {
      along += (g * inverse[a * p + q]) / inverse[q * (p + 1)];
    });
    return (centred ? meanSquare - mean * mean : meanSquare) * along ** 2;
  }

  /** Σ(1 − leverage) of each instrument's scans under the law with bend and lags free. */
  private ownDegreesOf(covariance: Float64Array | undefined, added: NewRow | undefined, count: number): Float64Array {
    const out = new Float64Array(this.d.instruments);
    const { jacobian, layout } = this.analysis.bend.full;
    if (!covariance) return out;
    const { p } = layout;
    for (let i = 0; i < this.d.n; i++) out[this.d.instrument[i]] += 1 - form(covariance, jacobian, i, p);
    if (added) out[added.instrument] += count * (1 - form(covariance, added.row, 0, p));
    return out;
  }

  /** Satterthwaite's degrees of freedom of a combination of parameters: each instrument's share of its variance counts with its scatter's, priors as known. */
  private effectiveDegrees(
    of: Float64Array,
    covariance: Float64Array,
    own: Float64Array,
    added: NewRow | undefined,
    count: number,
  ): number {
    const { jacobian, layout } = this.analysis.fit;
    const { p, rows } = layout;
    const along = new Float64Array(p);
    for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) along[a] += covariance[a * p + b] * of[b];
    const shares = new Float64Array(this.d.instruments);
    let total = 0;
    const take = (J: Float64Array, k: number, instrument: number, times: number) => {
      let c = 0;
      for (let b = 0; b < p; b++) c += along[b] * J[k * p + b];
      total += times * c * c;
      if (instrument >= 0) shares[instrument] += times * c * c;
    };
    for (let k = 0; k < rows; k++) take(jacobian, k, k < this.d.n ? this.d.instrument[k] : -1, 1);
    if (added) take(added.row, 0, added.instrument, count);
    let sum = 0;
    for (let j = 0; j < shares.length; j++)
      sum += shares[j] ** 2 / (this.analysis.bend.scatter.degrees[j] + own[j] - this.ownDegrees[j]);
    return Math.max(1, Math.min(1e4, (total * total) / sum));
  }
}

/** A combination of (ln K0, ln E0, q) in the parameters of a fit; a held q is none of them. */
function spread(of: readonly [number, number, number], layout: Layout): Float64Array {
  const out = new Float64Array(layout.p);
  out[0] = of[0];
  out[1] = of[1];
  if (layout.bend >= 0) out[layout.bend] = of[2];
  return out;
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
