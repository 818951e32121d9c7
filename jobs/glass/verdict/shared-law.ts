import type { SharedLaw, SharedLawDraws } from '../../../schema/wire/shared-law.ts';
import type { Verdict } from '../../../schema/wire/verdicts.ts';
import { localEnergy } from '../../laws/bend.ts';
import { studentQuantile } from '../../numeric/distributions.ts';
import type { Random } from '../../numeric/random.ts';
import { mean, median } from '../../numeric/statistics.ts';
import type { Melting } from '../driving-force.ts';
import { type BendAnalysis, trueLimits } from './analyse.ts';
import { believeBend } from './bend-belief.ts';
import { exponentOfCurve, exponentOfWidth, type JudgedEvent } from './collect.ts';
import { Condition, type ConditionValue } from './condition.ts';
import { type DrivenBend, drivenBend } from './driven-bend.ts';
import { type LawData, type LawFit, LawProblem } from './law-fit.ts';
import { type Combination, effectiveDegrees } from './scatter.ts';
import { type RivalShapes, rivalShapes, shapeVariance } from './shape-error.ts';

export interface SharedFit {
  law: SharedLaw;
  draws: SharedLawDraws;
  fit: LawFit;
  /** what was fitted, and the same law with its bend free, on which the bend that is left open rests */
  data: LawData;
  bent: LawFit;
  /** temperature of the material at each scan, offset and lag taken out, K */
  trueK: Float64Array;
  /** n of each scan's curve (of its width where it has none) */
  exponents: Float64Array;
  /** n − p of the fit, for Student's t on the draws */
  degrees: number;
  /** variance of ln E_loc at T beside the draws', where the law's shape is a guess */
  shapeVariance(temperatureK: number): number;
  /** VFT and MYEGA in the place of a free bend */
  rivals?: RivalShapes;
  /** the bend of a law that carries the driving force */
  drivenBend?: DrivenBend;
}

/**
 * The law that goes into forecasts: JMAK with the verdict's K(T) over all scans of the event. ln K0, E0 and q come from the characteristic
 * temperatures with each instrument's offset within what calibration allows and every lag free; n from the shape of every curve under that
 * law, so that a lag, which moves a curve as a whole, cannot reach it. `straight` and `instrument` hold q at 0, `material` leaves it free,
 * `undecided` holds it at its mean over both; the draws of all but `material` carry the bend that the data leave open (bend-belief.ts).
 * @param melting where it is known, a law that may bend carries the driving force
 */
export function fitSharedLaw(
  sample: string,
  judged: JudgedEvent,
  a: BendAnalysis,
  verdict: Verdict,
  glassTransitionK: number | undefined,
  random: Random,
  draws: number,
  melting?: Melting,
): SharedFit {
  const driven =
    melting && verdict !== 'straight' && verdict !== 'instrument' ? fitLawOf(a, verdict, melting) : undefined;
  const { d, problem, fit, bent, openBend } = driven ?? fitLawOf(a, verdict, undefined)!;
  const { driving } = d.condition;
  const trueK = Float64Array.from({ length: d.n }, (_, i) =>
    materialK(d.temperatureK[i] - fit.residualK[i], fit, d, i),
  );
  const exponents = exponentsUnder(judged, d, fit);
  const exponent = median(exponents);
  const { low, high } = trueLimits(d, fit);
  const drawn: SharedLawDraws = {
    lnRateAtMiddle: new Float64Array(draws),
    energyJPerMol: new Float64Array(draws),
    bend: new Float64Array(draws),
    avramiExponent: new Float64Array(draws),
  };
  const degrees = Math.max(1, d.n - fit.layout.p + d.instruments);
  const stretch = stretchOf(a, d, fit, degrees, low, high);
  const T = new Float64Array(d.n);
  const priors = new Float64Array(fit.layout.rows - d.n);
  const pick = new Float64Array(d.n);
  const free = fit.layout.bend >= 0;
  for (let k = 0; k < draws; k++) {
    resample(a, d, fit, random, T);
    for (let i = 0; i < priors.length; i++) priors[i] = random.normal();
    for (let i = 0; i < d.n; i++) pick[i] = exponents[random.integer(d.n)];
    const q = free ? undefined : fit.q + openBend * random.normal();
    const { parameters: x, converged } = problem.draw(fit.parameters, T, priors, q);
    const wide = (drawnValue: number, value: number) => value + (converged ? stretch * (drawnValue - value) : 0);
    drawn.lnRateAtMiddle[k] = wide(x[0], fit.lnK0);
    drawn.energyJPerMol[k] = Math.exp(wide(x[1], fit.lnEnergy));
    drawn.bend[k] = wide(q ?? x[2], fit.q);
    drawn.avramiExponent[k] = mean(pick);
  }
  const law: SharedLaw = {
    sample,
    event: judged.event,
    lnRateAtMiddle: fit.lnK0,
    energyJPerMol: Math.exp(fit.lnEnergy),
    bend: fit.q,
    x0PerK: d.scale.x0,
    dxPerK: d.scale.dx,
    avramiExponent: exponent,
    frozenBelowK: Math.min(low, glassTransitionK ?? Number.POSITIVE_INFINITY),
    lowestMeasuredK: low,
    highestMeasuredK: high,
    ...(glassTransitionK !== undefined && { glassTransitionK }),
    ...(driving && { driving }),
  };
  return {
    law,
    draws: drawn,
    fit,
    data: d,
    bent,
    trueK,
    exponents,
    degrees,
    ...(free && { rivals: rivalShapes(d, fit) }),
    ...(free && driving && { drivenBend: drivenBend(law, d, fit, a.scatter.degrees, a.inflation) }),
    shapeVariance: free && !driving ? shapeVariance(d, fit, a.inflation) : () => 0,
  };
}

/** Nearer to melting than this the driving factor falls so fast that its own error rules the law. */
const BELOW_MELTING = 0.97;

/**
 * The verdict's law over all scans, and by how much its held q may still move (one standard deviation).
 * @param melting  @returns undefined where the driving force does not go with the measured temperatures
 */
function fitLawOf(a: BendAnalysis, verdict: Verdict, melting: Melting | undefined) {
  const lags = verdict === 'undecided' ? favoured(a).settings.lags : a.full.settings.lags;
  const base = widenLags(a);
  if (melting && !(trueLimits(base, a.full).high < BELOW_MELTING * melting.temperatureK)) return undefined;
  const d = melting ? { ...base, condition: base.condition.withDriving(melting) } : base;
  const near = [a.full.lnK0, a.full.lnEnergy, a.full.q];
  const state = a.full.settings.state;
  const free = new LawProblem(d, { bend: 'free', lags, state });
  const bent = free.fit(near);
  if (melting && !bent.converged) return undefined;
  if (verdict === 'material') return { d, problem: free, fit: bent, bent, openBend: 0 };
  const belief = believeBend(a, bent);
  const centre = verdict === 'undecided' ? belief.mean : 0;
  const problem = new LawProblem(d, { bend: centre, lags, state });
  const openBend = Math.sqrt(belief.meanSquare + centre * (centre - 2 * belief.mean));
  return { d, problem, fit: problem.fit([bent.lnK0, bent.lnEnergy]), bent, openBend };
}

/**
 * Calibration's error of each lag, widened by as many times as the lag that the data ask for lies from it in joint standard errors, where that
 * is more than one (Birge 1932, Phys. Rev. 40:207): a contradiction too small to be called still belongs in the interval of E. Counts where
 * lags are held to calibration.
 */
function widenLags({ data: d, full }: BendAnalysis): LawData {
  const { layout, inverse } = full;
  const lagSeS = d.lagSeS.map((se, j) => {
    const own = inverse ? Math.sqrt(inverse[layout.lag[j] * (layout.p + 1)]) / d.topRate[j] : 0;
    return se * Math.max(1, Math.abs(full.lagS[j]) / Math.hypot(se, own));
  });
  return { ...d, lagSeS };
}

/**
 * Student's t is taken with n − p by whoever reads the draws. The weights are estimates, and an instrument with few scans has fewer degrees
 * of freedom: the draws are stretched to what the local energies at both ends and in the middle need.
 */
function stretchOf(a: BendAnalysis, d: LawData, fit: LawFit, degrees: number, low: number, high: number): number {
  const ends = fit.layout.bend >= 0 ? [low, high].map((T) => (1 / T - d.scale.x0) / d.scale.dx) : [0];
  const real = Math.max(
    ...ends.map((u) => {
      const energyThere: Combination =
        u === 0
          ? [[1, 1]]
          : [
              [1, 1],
              [2, u],
            ];
      return studentQuantile(0.975, effectiveDegrees(d, fit, energyThere, a.scatter.degrees));
    }),
  );
  return (
    Math.max(1, (real * a.inflation) / studentQuantile(0.975, degrees)) * Math.max(1, 1 / Math.sqrt(meanSquare(a)))
  );
}

/** Of the four laws the one with the lowest AICc; the plainest where the scans are too few for the others. */
function favoured({ data: d, laws }: BendAnalysis): LawFit {
  let best = laws.A;
  let lowest = Number.POSITIVE_INFINITY;
  for (const [fit, k] of [
    [laws.A, 2],
    [laws.L, 2 + d.instruments],
    [laws.G, 3],
    [laws.GL, 3 + d.instruments],
  ] as const) {
    const room = d.n - k - 1;
    const aicc = room > 0 ? fit.deviance + 2 * k + (2 * k * (k + 1)) / room : Number.POSITIVE_INFINITY;
    if (aicc < lowest) {
      lowest = aicc;
      best = fit;
    }
  }
  return best;
}

const materialK = (T: number, fit: LawFit, d: LawData, i: number): number =>
  T - fit.offsetK[d.instrument[i]] - fit.lagS[d.instrument[i]] * d.rate[i];

/** n a scan under a fitted law: from its curve, or from its width where it has no curve. */
export function exponentsUnder(judged: JudgedEvent, d: LawData, fit: LawFit): Float64Array {
  const half = new Condition('half', 1, d.condition.driving);
  const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
  return Float64Array.from(judged.scans, (scan, i) => {
    const shift = -fit.offsetK[d.instrument[i]] - fit.lagS[d.instrument[i]] * d.rate[i] - fit.residualK[i];
    const fromCurve = exponentOfCurve(scan, (T) => {
      half.evaluate(T + shift, fit.lnK0, fit.lnEnergy, fit.q, d.scale, at);
      return at.value;
    });
    if (fromCurve !== undefined) return fromCurve;
    const trueK = d.temperatureK[i] + shift;
    return exponentOfWidth(scan.event.widthK, trueK, localEnergy(1 / trueK, Math.exp(fit.lnEnergy), fit.q, d.scale));
  });
}

/** Mean of residual²/(variance (1 − leverage)): what the resampled residuals carry of the variance that the weights say. */
function meanSquare({ data: d, full }: BendAnalysis): number {
  return mean(full.residualK.map((r, i) => (r * r) / (d.variance[i] * (1 - full.leverage[i]))));
}

/**
 * Whole residuals of randomly chosen scans, divided by their own standard error and multiplied by the target's, times 1/√(1 − leverage), on
 * the law's temperatures. Residuals come from the law with bend and lags free, so that neither counts as scatter.
 */
function resample({ full }: BendAnalysis, d: LawData, fit: LawFit, random: Random, out: Float64Array): void {
  for (let i = 0; i < d.n; i++) {
    const from = random.integer(d.n);
    const lift = Math.sqrt(d.variance[i] / (d.variance[from] * (1 - full.leverage[from])));
    out[i] = d.temperatureK[i] - fit.residualK[i] + lift * full.residualK[from];
  }
}
