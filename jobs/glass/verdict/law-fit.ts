import type { BentScale } from '../../laws/bend.ts';
import { LeastSquares } from '../../numeric/least-squares.ts';
import { solveSymmetric } from '../../numeric/linear-solve.ts';
import type { Condition, ConditionValue } from './condition.ts';

/** One characteristic temperature of each scan of an event, all instruments. */
export interface LawData {
  n: number;
  rate: Float64Array;
  temperatureK: Float64Array;
  /** K², variance of each temperature */
  variance: Float64Array;
  /** index of each scan's instrument */
  instrument: Uint16Array;
  instruments: number;
  /** K, s: one standard error that calibration leaves; a lag error of 0 means that nothing is known and 0 is taken */
  offsetSeK: Float64Array;
  lagSeS: Float64Array;
  /** K/s, fastest scan of each instrument */
  topRate: Float64Array;
  scale: BentScale;
  condition: Condition;
}

export type LagMode = 'free' | 'calibrated';

export interface LawSettings {
  /** a number holds q at it */
  bend: 'free' | number;
  /** one mode an instrument */
  lags: readonly LagMode[];
  /** a free ln K offset for every instrument but the first (another state of the material) */
  state: boolean;
}

export interface LawFit {
  settings: LawSettings;
  lnK0: number;
  lnEnergy: number;
  q: number;
  offsetK: Float64Array;
  lagS: Float64Array;
  stateLnK: Float64Array;
  /** Σ residual²/variance, priors included */
  deviance: number;
  converged: boolean;
  message: string;
  evaluations: number;
  parameters: Float64Array;
  layout: Layout;
  /** (rows × p) whitened derivatives of the residuals, scans first, then priors; and the inverse of JᵀJ */
  jacobian: Float64Array;
  inverse?: Float64Array;
  /** measured − fitted, K */
  residualK: Float64Array;
  leverage: Float64Array;
}

/** Where each parameter lies; −1 where it is held. Lags are fitted as K at the instrument's fastest scan. */
export interface Layout {
  p: number;
  rows: number;
  bend: number;
  offset: number;
  lag: Int16Array;
  state: number;
}

/** |q| beyond this is no bend of one process: a factor e⁶ in E over the measured span. */
const LARGEST_BEND = 3;
const SCALE = { lnK: 1, lnEnergy: 0.1, bend: 0.1, offset: 1, lag: 1 };

export function layoutOf(d: LawData, s: LawSettings): Layout {
  const bend = s.bend === 'free' ? 2 : -1;
  const offset = s.bend === 'free' ? 3 : 2;
  let p = offset + d.instruments;
  let priors = d.instruments;
  const lag = new Int16Array(d.instruments).fill(-1);
  for (let j = 0; j < d.instruments; j++) {
    const free = s.lags[j] === 'free';
    if (!free && !(d.lagSeS[j] > 0)) continue;
    lag[j] = p++;
    if (!free) priors++;
  }
  const state = s.state && d.instruments > 1 ? p : -1;
  if (state >= 0) p += d.instruments - 1;
  return { p, rows: d.n + priors, bend, offset, lag, state };
}

/**
 * Least squares of T_i = T(β_i; ln K0, E0, q) + a_j + τ_j β_i, T(β) from the condition of the characteristic temperature, weighted by each
 * temperature's variance; what calibration knows of a_j (and of τ_j where its mode is `calibrated`) enters as extra residuals.
 * @param start parameters of a neighbouring fit with the same layout, or (ln K0, ln E0, q) alone
 * @param priorDraws standard normal deviates added to the prior residuals (Monte Carlo), in their order
 */
export function fitLaw(
  d: LawData,
  s: LawSettings,
  start: ArrayLike<number>,
  temperatureK: Float64Array = d.temperatureK,
  priorDraws?: Float64Array,
): LawFit {
  const layout = layoutOf(d, s);
  const { p, rows } = layout;
  const fixed = s.bend === 'free' ? 0 : s.bend;
  const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
  const lnRate = d.rate.map(Math.log);
  // Each solution of the condition starts from the one before.
  const last = Float64Array.from(temperatureK);
  const root = d.variance.map((v) => 1 / Math.sqrt(v));
  const model = (x: Float64Array, r: Float64Array, J: Float64Array): void => {
    const q = layout.bend >= 0 ? x[2] : fixed;
    if (!(Math.abs(q) < LARGEST_BEND) || !(Math.abs(x[1]) < 20)) {
      r.fill(Number.POSITIVE_INFINITY);
      return;
    }
    J.fill(0);
    for (let i = 0; i < d.n; i++) {
      const j = d.instrument[i];
      const stateAt = layout.state >= 0 && j > 0 ? layout.state + j - 1 : -1;
      const lnK0 = x[0] + (stateAt >= 0 ? x[stateAt] : 0);
      const T = d.condition.solve(lnRate[i], last[i], lnK0, x[1], q, d.scale, at);
      if (T > 0) last[i] = T;
      const w = root[i];
      const lagAt = layout.lag[j];
      const share = d.rate[i] / d.topRate[j];
      r[i] = w * (T + x[layout.offset + j] + (lagAt >= 0 ? x[lagAt] * share : 0) - temperatureK[i]);
      const per = -w / at.byTemperature;
      const row = i * p;
      J[row] = per;
      J[row + 1] = per * at.byLogEnergy;
      if (layout.bend >= 0) J[row + 2] = per * at.byBend;
      J[row + layout.offset + j] = w;
      if (lagAt >= 0) J[row + lagAt] = w * share;
      if (stateAt >= 0) J[row + stateAt] = per;
    }
    let row = d.n;
    for (let j = 0; j < d.instruments; j++) {
      const prior = (parameter: number, se: number) => {
        r[row] = x[parameter] / se - (priorDraws ? priorDraws[row - d.n] : 0);
        J[row * p + parameter] = 1 / se;
        row++;
      };
      prior(layout.offset + j, d.offsetSeK[j]);
      if (layout.lag[j] >= 0 && s.lags[j] === 'calibrated') prior(layout.lag[j], d.lagSeS[j] * d.topRate[j]);
    }
  };
  const from = new Float64Array(p);
  if (start.length === p) from.set(start);
  else for (let k = 0; k < (layout.bend >= 0 ? 3 : 2); k++) from[k] = start[k];
  const scale = new Float64Array(p).fill(SCALE.offset);
  scale[0] = SCALE.lnK;
  scale[1] = SCALE.lnEnergy;
  if (layout.bend >= 0) scale[2] = SCALE.bend;
  const fit = new LeastSquares(rows, p, model).solve(from, scale, 60, 1e-6);
  const x = fit.parameters;
  const residuals = new Float64Array(rows);
  const jacobian = new Float64Array(rows * p);
  model(x, residuals, jacobian);
  const inverse = invertNormal(jacobian, rows, p);
  return {
    settings: s,
    lnK0: x[0],
    lnEnergy: x[1],
    q: layout.bend >= 0 ? x[2] : fixed,
    offsetK: x.slice(layout.offset, layout.offset + d.instruments),
    lagS: Float64Array.from(layout.lag, (at, j) => (at >= 0 ? x[at] / d.topRate[j] : 0)),
    stateLnK: Float64Array.from({ length: d.instruments }, (_, j) =>
      layout.state >= 0 && j > 0 ? x[layout.state + j - 1] : 0,
    ),
    deviance: fit.sumOfSquares,
    converged: fit.converged && inverse !== undefined,
    message: fit.message,
    evaluations: fit.evaluations,
    parameters: x,
    layout,
    jacobian,
    inverse,
    residualK: Float64Array.from({ length: d.n }, (_, i) => -residuals[i] / root[i]),
    leverage: Float64Array.from({ length: d.n }, (_, i) =>
      inverse ? Math.min(0.999, quadratic(jacobian, i, inverse, p)) : 0,
    ),
  };
}

/** (JᵀJ)⁻¹, undefined where the rows do not determine every parameter. */
export function invertNormal(jacobian: Float64Array, rows: number, p: number): Float64Array | undefined {
  const normal = new Float64Array(p * p);
  for (let k = 0; k < rows; k++) {
    for (let a = 0; a < p; a++) {
      const v = jacobian[k * p + a];
      if (v !== 0) for (let b = 0; b < p; b++) normal[a * p + b] += v * jacobian[k * p + b];
    }
  }
  return solveSymmetric(normal, new Float64Array(p), p) ? normal : undefined;
}

/** J_k C J_kᵀ */
export function quadratic(jacobian: Float64Array, k: number, inverse: Float64Array, p: number): number {
  let sum = 0;
  for (let a = 0; a < p; a++) {
    let inner = 0;
    for (let b = 0; b < p; b++) inner += inverse[a * p + b] * jacobian[k * p + b];
    sum += jacobian[k * p + a] * inner;
  }
  return sum;
}
