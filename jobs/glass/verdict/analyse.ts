import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { studentQuantile } from '../../numeric/distributions.ts';
import { fitLine } from '../../numeric/line.ts';
import type { Random } from '../../numeric/random.ts';
import { bootstrapBend } from './bootstrap.ts';
import { fitLaw, type LagMode, type LawData, type LawFit, LawProblem, type LawSettings } from './law-fit.ts';
import { profileLimits } from './profile.ts';
import { applyScatter, effectiveDegrees, estimateScatter, type Scatter } from './scatter.ts';

/** Everything the decision needs about one characteristic temperature of an event. */
export interface BendAnalysis {
  data: LawData;
  /** the law with a bend and all lags free, with free state offsets where the data ask for them: what the bend is read from */
  full: LawFit;
  laws: { A: LawFit; L: LawFit; G: LawFit; GL: LawFit };
  scatter: Scatter;
  /** bend over the measured span: B = q × span, span close to 2 */
  span: number;
  bend: number;
  lower99: number;
  upper99: number;
  /** from the linear error, for the test that there is no bend */
  lower95: number;
  upper95: number;
  halfWidth99: number;
  /** factor ≥ 1 on Student's t for the estimated weights, from the bootstrap */
  inflation: number;
  /** of q, and degrees of freedom behind it */
  standardError: number;
  degrees: number;
  pValue: number;
  degreesOfFreedom: number;
  stateDiffers: boolean;
  /** per instrument: under a straight and under a bent law, does its lag leave what calibration allows? */
  lagBeyond: { straight: boolean[]; bent: boolean[] };
}

/** Rounds that settle weights and fit; the scatter changes by under 1 % in the last. */
const ROUNDS = 6;
const START_SCATTER_K = 0.5;
/** Two-sided chance at which a lag beyond calibration, or another state, is called: χ²₁ = 10.8 with many degrees of freedom. */
const BEYOND = 1 - 0.001 / 2;
const CONFIDENCE = 0.995;

const modes = (d: LawData, mode: LagMode): LagMode[] => new Array<LagMode>(d.instruments).fill(mode);

/** ln K0 and ln E0 of the straight line through all scans (Kissinger), as a start. */
export function startOf(d: LawData): [number, number] {
  const line = fitLine(
    d.temperatureK.map((T) => (1 / T - d.scale.x0) / d.scale.dx),
    d.rate.map((b, i) => Math.log(b) - 2 * Math.log(d.temperatureK[i])),
  );
  // A table whose temperatures fall with rate has no straight law; the fit then says that it did not converge.
  const energy = (Math.max(1, -line.slope) * GAS_CONSTANT) / d.scale.dx;
  return [line.intercept - Math.log(GAS_CONSTANT / energy), Math.log(energy)];
}

const START_BENDS = [0, 0.5, -0.5, 1.2];

/** The bend with all lags free, from several starts: a lag far off can look like a bend to one of them. */
function fitFull(d: LawData, start: ArrayLike<number>): LawFit {
  let best: LawFit | undefined;
  for (const bend of START_BENDS) {
    const held = fitLaw(d, { bend, lags: modes(d, 'free'), state: false }, start);
    const fit = fitLaw(d, { bend: 'free', lags: modes(d, 'free'), state: false }, withBend(held, bend));
    if (fit.converged && (!best || fit.deviance < best.deviance - 1e-9)) best = fit;
  }
  return best ?? fitLaw(d, { bend: 'free', lags: modes(d, 'free'), state: false }, [start[0], start[1], 0]);
}

/** Parameters of a fit with the bend held, with the bend put in. */
function withBend({ parameters }: LawFit, q: number): Float64Array {
  const out = new Float64Array(parameters.length + 1);
  out.set(parameters.subarray(0, 2));
  out[2] = q;
  out.set(parameters.subarray(2), 3);
  return out;
}

/** Degrees of freedom left by the bent law with all lags free. */
export const degreesLeft = (d: LawData, state = false): number =>
  d.n - 3 - d.instruments - (state ? d.instruments - 1 : 0);

/** The law with a bend and free lags at the weights that its own scatter gives. */
export interface SettledBend {
  full: LawFit;
  scatter: Scatter;
  stateDiffers: boolean;
  /** where other laws' fits begin: the straight line through all scans */
  start: [number, number];
}

/**
 * Fits the bend with all lags free. Writes the weights it settles on into `d.variance`.
 * @param own K, error of each temperature from its own noise
 * @param near parameters of such a fit on nearly the same temperatures: it then begins there and not from several starts
 * @returns undefined when the bent law cannot be fitted
 */
export function settleBend(d: LawData, own: Float64Array, near?: LawFit): SettledBend | undefined {
  for (let i = 0; i < d.n; i++) d.variance[i] = own[i] ** 2 + START_SCATTER_K ** 2;
  const start = startOf(d);
  let full = near
    ? fitLaw(d, { bend: 'free', lags: modes(d, 'free'), state: false }, [near.lnK0, near.lnEnergy, near.q])
    : fitFull(d, start);
  if (!full.converged) return undefined;
  let scatter = estimateScatter(d, own, full.residualK, full.leverage);
  const settle = (): void => {
    const problem = new LawProblem(d, full.settings);
    for (let round = 0; round < ROUNDS; round++) {
      scatter = estimateScatter(d, own, full.residualK, full.leverage);
      applyScatter(d, own, scatter);
      full = problem.fit(full.parameters);
    }
  };
  settle();
  if (!full.converged) return undefined;
  const state = findState(d, full, scatter);
  if (state) {
    full = state;
    settle();
    if (!full.converged) return undefined;
  }
  return { full, scatter, stateDiffers: state !== undefined, start };
}

/** The bend and its linear 99 % half width: a second opinion. */
export function bendOf(d: LawData, { full, scatter }: SettledBend): { bend: number; halfWidth99: number } {
  const span = spanOf(d, full);
  const t = studentQuantile(CONFIDENCE, effectiveDegrees(d, full, 2, scatter.degrees));
  return { bend: full.q * span, halfWidth99: t * standardErrorOf(full) * span };
}

const standardErrorOf = (full: LawFit): number => Math.sqrt(full.inverse?.[2 * full.layout.p + 2] ?? Number.NaN);

/**
 * The bend, its interval and the evidence beside it.
 * @param own K, error of each temperature from its own noise
 * @param random without it the interval is the linear one and there is no p value: too few scans for a decision
 */
export function analyseBend(
  d: LawData,
  own: Float64Array,
  { full, scatter, stateDiffers, start }: SettledBend,
  random: Random | undefined,
  draws: number,
): BendAnalysis {
  const near = [full.lnK0, full.lnEnergy, full.q];
  const refit = (bend: LawSettings['bend'], lags: LagMode) =>
    fitLaw(d, { bend, lags: modes(d, lags), state: false }, near);
  const laws = {
    A: bestOf(d, { bend: 0, lags: modes(d, 'calibrated'), state: false }, near, start),
    L: bestOf(d, { bend: 0, lags: modes(d, 'free'), state: false }, near, start),
    G: refit('free', 'calibrated'),
    GL: stateDiffers ? refit('free', 'free') : full,
  };
  const span = spanOf(d, full);
  const se = standardErrorOf(full);
  const degrees = effectiveDegrees(d, full, 2, scatter.degrees);
  const t = studentQuantile(CONFIDENCE, degrees);
  const t95 = studentQuantile(0.975, degrees);
  const straight = stateDiffers ? fitLaw(d, { ...full.settings, bend: 0 }, near) : laws.L;
  const observed = Math.sqrt(Math.max(0, straight.deviance - full.deviance));
  let limits: [number, number] = [full.q - t * se, full.q + t * se];
  let pValue = Number.NaN;
  let inflation = 1;
  if (random) {
    const boot = bootstrapBend(d, own, full, degrees, observed, random, draws);
    pValue = boot.pValue;
    inflation = boot.inflation;
    limits = profileLimits(d, full, t * boot.inflation, se);
  }
  const beyond = (bend: LawSettings['bend'], free: LawFit) =>
    Array.from({ length: d.instruments }, (_, j) => {
      const at = free.layout.lag[j];
      const lags = modes(d, 'free').map((m, k) => (k === j ? 'calibrated' : m));
      const held = fitLaw(d, { ...free.settings, bend, lags }, near);
      const limit = studentQuantile(BEYOND, effectiveDegrees(d, free, at, scatter.degrees)) ** 2;
      return held.deviance - free.deviance > limit;
    });
  return {
    data: d,
    full,
    laws,
    scatter,
    span,
    bend: full.q * span,
    lower99: Math.min(limits[0] * span, limits[1] * span),
    upper99: Math.max(limits[0] * span, limits[1] * span),
    lower95: (full.q - t95 * inflation * se) * span,
    upper95: (full.q + t95 * inflation * se) * span,
    inflation,
    standardError: se,
    degrees,
    halfWidth99: (Math.abs(limits[1] - limits[0]) / 2) * span,
    pValue,
    degreesOfFreedom: degreesLeft(d, stateDiffers),
    stateDiffers,
    lagBeyond: { straight: beyond(0, laws.L), bent: beyond('free', full) },
  };
}

function bestOf(d: LawData, s: LawSettings, ...starts: ArrayLike<number>[]): LawFit {
  const fits = starts.map((start) => fitLaw(d, s, start));
  return fits.reduce((a, b) => (b.deviance < a.deviance ? b : a));
}

/** A fit with another ln K on each further instrument, where that lowers the deviance by more than chance would. */
function findState(d: LawData, full: LawFit, scatter: Scatter): LawFit | undefined {
  if (d.instruments < 2 || degreesLeft(d, true) < 3) return undefined;
  const fit = fitLaw(d, { ...full.settings, state: true }, [full.lnK0, full.lnEnergy, full.q]);
  if (!fit.converged) return undefined;
  let limit = 0;
  for (let j = 1; j < d.instruments; j++) {
    limit += studentQuantile(BEYOND, effectiveDegrees(d, fit, fit.layout.state + j - 1, scatter.degrees)) ** 2;
  }
  return full.deviance - fit.deviance > limit ? fit : undefined;
}

/** u at the slowest scan − u at the fastest, at the temperatures of the material. */
function spanOf(d: LawData, fit: LawFit): number {
  const { low, high } = trueLimits(d, fit);
  return (1 / low - 1 / high) / d.scale.dx;
}

/** Lowest and highest temperature of the material, offset and lag taken out, K. */
export function trueLimits(d: LawData, fit: LawFit): { low: number; high: number } {
  let low = Number.POSITIVE_INFINITY;
  let high = 0;
  for (let i = 0; i < d.n; i++) {
    const j = d.instrument[i];
    const T = d.temperatureK[i] - fit.residualK[i] - fit.offsetK[j] - fit.lagS[j] * d.rate[i];
    low = Math.min(low, T);
    high = Math.max(high, T);
  }
  return { low, high };
}
