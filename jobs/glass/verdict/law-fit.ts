import type { BentScale } from '../../laws/bend.ts';
import { LeastSquares, type Minimum } from '../../numeric/least-squares.ts';
import { SymmetricSolver } from '../../numeric/linear-solve.ts';
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
/** A draw has converged when its last step was this small against the scale below: the one after would be its square. */
const DRAW_STEP = 1e-4;
/** A temperature is carried on along its derivatives over this part of itself at most. */
const FAR = 0.05;
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
 * Made once for data and settings, with all buffers; the weights are those of `d.variance` when a fit begins.
 */
export class LawProblem {
  readonly layout: Layout;
  private readonly solver: LeastSquares;
  private readonly scale: Float64Array;
  private readonly lnRate: Float64Array;
  /** rate ÷ the instrument's fastest */
  private readonly share: Float64Array;
  private readonly root: Float64Array;
  private readonly at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
  /** The last solution of each scan's condition and its derivatives by (ln K, ln E0, q): where the next one is looked for. */
  private readonly solvedK: Float64Array;
  private readonly slopes: Float64Array;
  private readonly solvedAt: Float64Array;
  private temperatureK: Float64Array;
  private priorDraws: Float64Array | undefined;
  private bend: number;

  constructor(
    private readonly d: LawData,
    private readonly settings: LawSettings,
  ) {
    this.layout = layoutOf(d, settings);
    const { p, rows } = this.layout;
    this.solver = new LeastSquares(rows, p, (x, r, J) => this.evaluate(x, r, J));
    this.scale = new Float64Array(p).fill(SCALE.offset);
    this.scale[0] = SCALE.lnK;
    this.scale[1] = SCALE.lnEnergy;
    if (this.layout.bend >= 0) this.scale[2] = SCALE.bend;
    this.bend = settings.bend === 'free' ? 0 : settings.bend;
    this.lnRate = d.rate.map(Math.log);
    this.share = d.rate.map((rate, i) => rate / d.topRate[d.instrument[i]]);
    this.root = new Float64Array(d.n);
    this.solvedK = new Float64Array(d.n);
    this.slopes = new Float64Array(3 * d.n);
    this.solvedAt = new Float64Array(3 * d.n);
    this.temperatureK = d.temperatureK;
  }

  private begin(start: ArrayLike<number>, temperatureK: Float64Array, priorDraws: Float64Array | undefined) {
    const { d, root, layout } = this;
    this.temperatureK = temperatureK;
    this.priorDraws = priorDraws;
    for (let i = 0; i < d.n; i++) root[i] = 1 / Math.sqrt(d.variance[i]);
    const from = new Float64Array(layout.p);
    if (start.length === layout.p) from.set(start);
    else for (let k = 0; k < (layout.bend >= 0 ? 3 : 2); k++) from[k] = start[k];
    return from;
  }

  /** @param start parameters of a neighbouring fit with the same layout, or (ln K0, ln E0, q) alone */
  fit(start: ArrayLike<number>, temperatureK: Float64Array = this.d.temperatureK): LawFit {
    const from = this.begin(start, temperatureK, undefined);
    this.solvedK.set(temperatureK);
    this.slopes.fill(0);
    const minimum = this.solver.minimise(from, this.scale, 60, 1e-6);
    return this.describe(minimum);
  }

  /**
   * The parameters alone, near a fit that came before: for draws.
   * @param bend holds q at it where the settings hold it   @param priorDraws standard normal deviates added to the prior residuals, in order
   */
  draw(start: Float64Array, temperatureK: Float64Array, priorDraws: Float64Array, bend?: number): Minimum {
    const from = this.begin(start, temperatureK, priorDraws);
    if (bend !== undefined) this.bend = bend;
    return this.solver.minimise(from, this.scale, 30, DRAW_STEP, false);
  }

  private evaluate(x: Float64Array, r: Float64Array, J: Float64Array): void {
    const { d, layout, at, settings } = this;
    const { p } = layout;
    const q = layout.bend >= 0 ? x[2] : this.bend;
    if (!(Math.abs(q) < LARGEST_BEND) || !(Math.abs(x[1]) < 20)) {
      r.fill(Number.POSITIVE_INFINITY);
      return;
    }
    J.fill(0);
    for (let i = 0; i < d.n; i++) {
      const j = d.instrument[i];
      const stateAt = layout.state >= 0 && j > 0 ? layout.state + j - 1 : -1;
      const lnK0 = x[0] + (stateAt >= 0 ? x[stateAt] : 0);
      const T = this.solveScan(i, lnK0, x[1], q);
      const lagAt = layout.lag[j];
      const w = this.root[i];
      r[i] = w * (T + x[layout.offset + j] + (lagAt >= 0 ? x[lagAt] * this.share[i] : 0) - this.temperatureK[i]);
      const per = -w / at.byTemperature;
      const row = i * p;
      J[row] = per;
      J[row + 1] = per * at.byLogEnergy;
      if (layout.bend >= 0) J[row + 2] = per * at.byBend;
      J[row + layout.offset + j] = w;
      if (lagAt >= 0) J[row + lagAt] = w * this.share[i];
      if (stateAt >= 0) J[row + stateAt] = per;
    }
    let row = d.n;
    const prior = (parameter: number, se: number) => {
      r[row] = x[parameter] / se - (this.priorDraws ? this.priorDraws[row - d.n] : 0);
      J[row * p + parameter] = 1 / se;
      row++;
    };
    for (let j = 0; j < d.instruments; j++) {
      prior(layout.offset + j, d.offsetSeK[j]);
      if (layout.lag[j] >= 0 && settings.lags[j] === 'calibrated') prior(layout.lag[j], d.lagSeS[j] * d.topRate[j]);
    }
  }

  /** Temperature of scan i under the law, from the last one carried on along its derivatives: mostly one evaluation is enough. */
  private solveScan(i: number, lnK0: number, lnEnergy: number, q: number): number {
    const { d, at, slopes, solvedAt, solvedK } = this;
    const k = 3 * i;
    const start =
      solvedK[i] +
      slopes[k] * (lnK0 - solvedAt[k]) +
      slopes[k + 1] * (lnEnergy - solvedAt[k + 1]) +
      slopes[k + 2] * (q - solvedAt[k + 2]);
    const from = Math.abs(start - solvedK[i]) < FAR * solvedK[i] ? start : solvedK[i];
    const T = d.condition.solve(this.lnRate[i], from, lnK0, lnEnergy, q, d.scale, at);
    if (T > 0) {
      solvedK[i] = T;
      slopes[k] = -1 / at.byTemperature;
      slopes[k + 1] = slopes[k] * at.byLogEnergy;
      slopes[k + 2] = slopes[k] * at.byBend;
      solvedAt[k] = lnK0;
      solvedAt[k + 1] = lnEnergy;
      solvedAt[k + 2] = q;
    }
    return T;
  }

  private describe(minimum: Minimum): LawFit {
    const { d, layout, root, settings } = this;
    const { p, rows } = layout;
    const x = minimum.parameters;
    const residuals = new Float64Array(rows);
    const jacobian = new Float64Array(rows * p);
    this.evaluate(x, residuals, jacobian);
    const inverse = invertNormal(jacobian, rows, p);
    const leverage = new Float64Array(d.n);
    if (inverse) for (let i = 0; i < d.n; i++) leverage[i] = Math.min(0.999, quadratic(jacobian, i, inverse, p));
    return {
      settings,
      lnK0: x[0],
      lnEnergy: x[1],
      q: layout.bend >= 0 ? x[2] : this.bend,
      offsetK: x.slice(layout.offset, layout.offset + d.instruments),
      lagS: Float64Array.from(layout.lag, (at, j) => (at >= 0 ? x[at] / d.topRate[j] : 0)),
      stateLnK: Float64Array.from({ length: d.instruments }, (_, j) =>
        layout.state >= 0 && j > 0 ? x[layout.state + j - 1] : 0,
      ),
      deviance: minimum.sumOfSquares,
      converged: minimum.converged && inverse !== undefined,
      message: minimum.message,
      evaluations: minimum.evaluations,
      parameters: x,
      layout,
      jacobian,
      inverse,
      residualK: residuals.subarray(0, d.n).map((r, i) => -r / root[i]),
      leverage,
    };
  }
}

/** One fit; see LawProblem. */
export const fitLaw = (d: LawData, s: LawSettings, start: ArrayLike<number>): LawFit => new LawProblem(d, s).fit(start);

/** (JᵀJ)⁻¹, undefined where the rows do not determine every parameter. */
export function invertNormal(jacobian: Float64Array, rows: number, p: number): Float64Array | undefined {
  const normal = new Float64Array(p * p);
  for (let k = 0; k < rows; k++) {
    for (let a = 0; a < p; a++) {
      const v = jacobian[k * p + a];
      if (v !== 0) for (let b = 0; b <= a; b++) normal[a * p + b] += v * jacobian[k * p + b];
    }
  }
  const solver = new SymmetricSolver(p);
  if (!solver.factor(normal)) return undefined;
  solver.invert(normal);
  return normal;
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
