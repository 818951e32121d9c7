import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import type { LnIntegrals } from '../../laws/arrhenius-integral.ts';
import { approachMinimum, type LeastSquaresResult } from '../../numeric/least-squares.ts';
import { SymmetricSolver } from '../../numeric/linear-solve.ts';
import { CONVERSION_COUNT, CONVERSIONS } from '../event-data.ts';
import { LN_LN } from './ozawa.ts';

/** Fills ln ∫ exp(−(E/R)(1/T − x0)) dt from the start of the programme to each conversion, scan-major. */
export type CumulativeIntegrals = (energy: number, out: LnIntegrals) => void;

export interface JmakEstimate {
  energy: number;
  /** ln A, A in 1/s */
  lnPrefactor: number;
  exponent: number;
  /** Of a fit from scratch only */
  quality?: JmakQuality;
  fit: LeastSquaresResult;
}

export interface JmakQuality {
  /** root mean square residual in α, each scan at its own shift */
  residualRms: number;
  /** root mean square of the scans' shifts in units of their scatter: far above 1, one energy does not place the scans */
  shiftRms: number;
}

/** Size of a meaningful change of (E, ln K at x0, n). */
const SCALE = Float64Array.of(1e5, 1, 1);
const CONVERSION = Float64Array.from(CONVERSIONS);
const LN_LN_1A = Float64Array.from(LN_LN);
/** dα/d ln X at each conversion. */
const SLOPE = CONVERSION.map((a) => -(1 - a) * Math.log1p(-a));

/** Standard deviation of one α of a curve about the law when the scan sits right: noise and baseline, about half a per cent. */
const CURVE_SIGMA = 0.005;
/** Step ÷ scale at which a fit has converged: to the last digit, and in a draw, where what is left after such a step goes with its square. */
const LAST_DIGIT = 1e-9;
const DRAW_TOLERANCE = 1e-4;
/** In a draw integrals are carried this part of E along their derivatives: what is left out is below 1e-7. */
const REACH = 5e-3;
const MOST_STEPS = 60;
/**
 * How a pass takes the residuals r: those of n ln X from ln[−ln(1−α)], times dα/d ln X; those of α, whose products of first derivatives stand for
 * the second (Gauss–Newton); or those of α with the second derivatives (Newton). E moves against all shifts at once with little resistance
 * but that of the scatter, and there Gauss–Newton gains only a digit a step.
 */
type Pass = 'logarithmic' | 'first-order' | 'second-order';
/** A first step of a draw beyond this, in units of `SCALE`, is not taken. */
const FIRST_STEP = 1;
const DAMPING_LIMIT = 1e8;
const P = 3;

/**
 * Johnson–Mehl–Avrami–Kolmogorov on all scans of an event at once: α = 1 − exp[−(∫K dt)^n], K = exp(ln K0 − (E/R)(1/T − x0)), by
 * least squares on α at 0.05 … 0.95. x0 is the mean inverse temperature, so that E and ln K0 hardly correlate. It holds for site
 * saturation, or where nucleation and growth share one energy (Henderson 1979, J. Non-Cryst. Solids 30:301).
 *
 * One scan's whole curve moves together, so each scan has a temperature shift δ of its own, held by its scatter σ between scans: the sum
 * of squares is Σ_i [Σ_k (α̂(T_ik − δ_i) − α_k)²/σ_α² + δ_i²/σ_i²]. n then comes from the shape of each curve and E from where the curves
 * sit; without δ a scatter of 1.5 K on a chip read n 1.3 % low. δ acts on ln ∫K dt as −δ E/(R T²).
 *
 * Damped Gauss–Newton on (E, ln K0, n) and all δ together. A draw takes its first step in ln[−ln(1−α)] = n ln ∫K dt, where the law is all but
 * linear and costs no exponential. Each δ meets only its own scan, so the normal matrix is a 3 × 3 block, a diagonal
 * and a border: the diagonal is eliminated (Schur complement) while the one pass over the points makes the sums; no Jacobian is stored.
 */
export class JmakFit {
  private readonly integrals: LnIntegrals;
  /** where `integrals` were made, J/mol, and the part of it that they may be carried */
  private madeAt = 0;
  private reach = 0;
  /** 1/(R T²), mol/(J K): what a shift of 1 K does to E/(R T), per J/mol */
  private readonly perKelvin: Float64Array;
  private readonly shifts: Float64Array;
  private readonly trialShifts: Float64Array;
  /** of the last pass: Σ of squares of α alone */
  private curveSquares = 0;
  /** Schur complement of the normal matrix and its right-hand side */
  private readonly normal = new Float64Array(P * P);
  private readonly gradient = new Float64Array(P);
  /** per scan: Σ g², Σ g r, and Σ g J for the three parameters, up to one common factor */
  private readonly border: Float64Array;
  /** the sums before a step that may have to be taken back */
  private readonly keptNormal = new Float64Array(P * P);
  private readonly keptGradient = new Float64Array(P);
  private readonly keptBorder: Float64Array;
  private readonly next = new Float64Array(P);
  private readonly solver = new SymmetricSolver(P);
  /** per row of the curve scans */
  private readonly usable?: Uint8Array;

  /**
   * @param sigmaK scatter of each curve scan's temperature, K   @param temperatureK scan-major over all scans, read at every fit
   * @param curves scans with curves   @param usable 0 for points to leave out, as `temperatureK`; all count when missing
   */
  constructor(
    private readonly sigmaK: ArrayLike<number>,
    private readonly x0: number,
    private readonly temperatureK: Float64Array,
    private readonly curves: ArrayLike<number>,
    private readonly cumulative: CumulativeIntegrals,
    usable?: Uint8Array,
  ) {
    const rows = sigmaK.length * CONVERSION_COUNT;
    const column = () => new Float64Array(rows);
    this.integrals = { value: column(), byEnergy: column(), byEnergy2: column() };
    this.perKelvin = new Float64Array(rows);
    this.shifts = new Float64Array(sigmaK.length);
    this.trialShifts = new Float64Array(sigmaK.length);
    this.border = new Float64Array(sigmaK.length * (P + 2));
    this.keptBorder = new Float64Array(this.border.length);
    this.usable =
      usable &&
      Uint8Array.from(
        { length: rows },
        (_, row) => usable[curves[Math.floor(row / CONVERSION_COUNT)] * CONVERSION_COUNT + (row % CONVERSION_COUNT)],
      );
  }

  /** From a rough start, to the last digit. Where that fails the library's Levenberg–Marquardt brings it near first. */
  fitFromScratch(start: Float64Array): JmakEstimate {
    const own = this.solve(start, LAST_DIGIT, 0);
    const fit = own.converged ? own : this.solve(this.approach(start), LAST_DIGIT, 0);
    const rms = (sum: number, n: number) => Math.sqrt(sum / n);
    const n = this.sigmaK.length;
    return {
      quality: {
        residualRms: rms(this.curveSquares, n * CONVERSION_COUNT),
        shiftRms: rms(
          this.shifts.reduce((sum, d, i) => sum + (d / this.sigmaK[i]) ** 2, 0),
          n,
        ),
      },
      ...this.result(fit),
    };
  }

  /** From a neighbouring answer (Monte Carlo draws). @param energyRatio by which other methods' E differs from theirs there */
  fitFrom(neighbour: Float64Array, energyRatio: number): JmakEstimate {
    const [energy, lnK0, exponent] = neighbour;
    return this.result(this.solve(Float64Array.of(energy * energyRatio, lnK0, exponent), DRAW_TOLERANCE, REACH));
  }

  private result(fit: LeastSquaresResult): JmakEstimate {
    const [energy, lnK0, exponent] = fit.parameters;
    return { energy, lnPrefactor: lnK0 + (energy * this.x0) / GAS_CONSTANT, exponent, fit };
  }

  /**
   * @param tolerance step ÷ scale   @param reach see `REACH`; 0: from a rough start, so integrals anew for every E, no step in the logarithm
   * first, and Gauss–Newton throughout
   */
  private solve(start: Float64Array, tolerance: number, reach: number): LeastSquaresResult {
    this.reach = reach;
    this.madeAt = 0;
    const { normal, gradient, border, keptNormal, keptGradient, keptBorder, next } = this;
    for (let i = 0; i < this.curves.length; i++) {
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const T = this.temperatureK[this.curves[i] * CONVERSION_COUNT + k];
        this.perKelvin[i * CONVERSION_COUNT + k] = 1 / (GAS_CONSTANT * T * T);
      }
    }
    let shifts = this.shifts.fill(0);
    let trial = this.trialShifts;
    const parameters = start.slice();
    if (reach > 0) {
      this.accumulate(parameters, shifts, 'logarithmic');
      if (this.makeStep(parameters, shifts, trial, 0) < FIRST_STEP) {
        parameters.set(next);
        [shifts, trial] = [trial, shifts];
      }
    }
    let pass: Pass = reach > 0 ? 'second-order' : 'first-order';
    let sum = this.accumulate(parameters, shifts, pass);
    let evaluations = 1;
    let damping = 0;
    let converged = false;
    let message = `not converged after ${MOST_STEPS} iterations`;
    for (let step = 0; step < MOST_STEPS; step++) {
      if (!Number.isFinite(sum)) {
        message = 'the model gave no finite value at the start';
        break;
      }
      keptNormal.set(normal);
      keptGradient.set(gradient);
      keptBorder.set(border);
      const largest = this.makeStep(parameters, shifts, trial, damping);
      if (Number.isNaN(largest) && pass === 'second-order') {
        pass = 'first-order';
        this.accumulate(parameters, shifts, pass);
        evaluations++;
        continue;
      }
      if (Number.isNaN(largest)) {
        message = 'the normal matrix is singular: the data do not determine every parameter';
        break;
      }
      if (largest < tolerance) {
        parameters.set(next);
        [shifts, trial] = [trial, shifts];
        converged = true;
        message = `last step ${largest.toExponential(1)} of the parameters' scale`;
        break;
      }
      const sum2 = this.accumulate(next, trial, pass);
      evaluations++;
      if (sum2 <= sum) {
        parameters.set(next);
        [shifts, trial] = [trial, shifts];
        sum = sum2;
        damping = damping < 1e-6 ? 0 : damping / 10;
      } else if (pass === 'second-order') {
        pass = 'first-order';
        this.accumulate(parameters, shifts, pass);
        evaluations++;
      } else {
        normal.set(keptNormal);
        gradient.set(keptGradient);
        border.set(keptBorder);
        if (damping > DAMPING_LIMIT) {
          message = 'no step lowers the residual any more';
          converged = largest < LAST_DIGIT ** 0.5;
          break;
        }
        damping = damping === 0 ? 1e-3 : damping * 10;
      }
    }
    if (shifts !== this.shifts) this.shifts.set(shifts);
    return { parameters, sumOfSquares: sum, converged, message, evaluations };
  }

  /**
   * The step that the sums of the last pass ask for, parameters into `next` and shifts into `trial`; the sums are overwritten.
   * @returns its largest part ÷ scale, NaN where the matrix is singular
   */
  private makeStep(parameters: Float64Array, shifts: Float64Array, trial: Float64Array, damping: number): number {
    const { normal, gradient, border, next } = this;
    for (let i = 0; i < P; i++) normal[i * P + i] *= 1 + damping;
    if (!this.solver.factor(normal)) return Number.NaN;
    this.solver.solve(gradient);
    let largest = 0;
    for (let i = 0; i < P; i++) {
      next[i] = parameters[i] - gradient[i];
      largest = Math.max(largest, Math.abs(gradient[i]) / SCALE[i]);
    }
    for (let i = 0; i < shifts.length; i++) {
      const b = i * (P + 2);
      const move =
        (border[b + 1] - border[b + 2] * gradient[0] - border[b + 3] * gradient[1] - border[b + 4] * gradient[2]) /
        border[b];
      trial[i] = shifts[i] - move;
    }
    return largest;
  }

  /**
   * One pass over the points: the sum of squares (infinite outside the model's range) and the sums that the next step needs.
   */
  private accumulate(p: Float64Array, shifts: Float64Array, pass: Pass): number {
    const energy = p[0];
    const lnK0 = p[1];
    const n = p[2];
    if (!(energy > 0) || !(n > 0.05) || n > 50) return Number.POSITIVE_INFINITY;
    const { perKelvin, border, normal, usable } = this;
    if (!(Math.abs(energy - this.madeAt) < this.reach * energy)) {
      this.cumulative(energy, this.integrals);
      this.madeAt = energy;
    }
    const { value, byEnergy, byEnergy2 } = this.integrals;
    const moved = energy - this.madeAt;
    const logarithmic = pass === 'logarithmic';
    const second = pass === 'second-order';
    const perN = 1 / n;
    // Sums leave out the n that E, ln K0 and the shifts act on n ln X with.
    let curveSquares = 0;
    let shiftSquares = 0;
    let n00 = 0;
    let n01 = 0;
    let n02 = 0;
    let n11 = 0;
    let n12 = 0;
    let n22 = 0;
    let b0 = 0;
    let b1 = 0;
    let b2 = 0;
    for (let i = 0; i < shifts.length; i++) {
      const shift = shifts[i];
      const prior = CURVE_SIGMA / this.sigmaK[i];
      let gg = prior * prior * perN * perN;
      let gr = prior * prior * shift * perN;
      let g0 = 0;
      let g1 = 0;
      let g2 = 0;
      shiftSquares += prior * prior * shift * shift;
      const from = i * CONVERSION_COUNT;
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const row = from + k;
        if (usable && usable[row] === 0) continue;
        const perShift = perKelvin[row];
        const bend = moved * byEnergy2[row];
        const lnX = lnK0 + value[row] + moved * (byEnergy[row] + bend / 2) - energy * perShift * shift;
        // Derivatives of ln X by E and by the shift, and those of r by n ln X.
        const byE = byEnergy[row] + bend - perShift * shift;
        const byShift = -energy * perShift;
        let slope = SLOPE[k];
        let r = slope * (n * lnX - LN_LN_1A[k]);
        let curvature = 0;
        if (!logarithmic) {
          const X = Math.exp(n * lnX);
          const left = Math.exp(-X);
          r = 1 - left - CONVERSION[k];
          slope = left * X;
          if (second) curvature = slope * (1 - X);
        }
        curveSquares += r * r;
        const f = r * slope;
        const q = slope * slope + r * curvature;
        const s = second ? f : 0;
        const qE = q * byE;
        const qShift = q * byShift;
        const qX = q * lnX;
        gg += qShift * byShift;
        gr += f * byShift;
        g0 += qShift * byE - s * perShift * perN;
        g1 += qShift;
        g2 += qShift * lnX + s * byShift * perN;
        b0 += f * byE;
        b1 += f;
        b2 += f * lnX;
        n00 += qE * byE + s * byEnergy2[row] * perN;
        n01 += qE;
        n02 += qE * lnX + s * byE * perN;
        n11 += q;
        n12 += qX + s * perN;
        n22 += qX * lnX;
      }
      const b = i * (P + 2);
      border[b] = gg;
      border[b + 1] = gr * perN;
      border[b + 2] = g0;
      border[b + 3] = g1;
      border[b + 4] = g2 * perN;
      b0 -= (g0 * gr) / gg;
      b1 -= (g1 * gr) / gg;
      b2 -= (g2 * gr) / gg;
      n00 -= (g0 * g0) / gg;
      n01 -= (g0 * g1) / gg;
      n02 -= (g0 * g2) / gg;
      n11 -= (g1 * g1) / gg;
      n12 -= (g1 * g2) / gg;
      n22 -= (g2 * g2) / gg;
    }
    this.gradient[0] = n * b0;
    this.gradient[1] = n * b1;
    this.gradient[2] = b2;
    normal[0] = n * n * n00;
    normal[1] = normal[3] = n * n * n01;
    normal[2] = normal[6] = n * n02;
    normal[4] = n * n * n11;
    normal[5] = normal[7] = n * n12;
    normal[8] = n22;
    this.curveSquares = curveSquares;
    return curveSquares + shiftSquares;
  }

  /** Without shifts, by the library, whose numeric derivatives and adaptive damping forgive a poor start. */
  private approach(start: Float64Array): Float64Array {
    const { value } = this.integrals;
    const rows = value.length;
    return approachMinimum(
      ([energy, lnK0, n]) => {
        // The library squares what it gets: a large finite value stands for "outside the model's range".
        if (!(energy > 0) || !(n > 0.05) || n > 50) return new Float64Array(rows).fill(1e3);
        this.cumulative(energy, this.integrals);
        return Float64Array.from(value, (v, row) => {
          const X = Math.exp(n * (lnK0 + v));
          return 1 - Math.exp(-X) - CONVERSION[row % CONVERSION_COUNT];
        });
      },
      start,
      SCALE,
      rows,
    );
  }
}
