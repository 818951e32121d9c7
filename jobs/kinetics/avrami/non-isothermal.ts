import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import type { ArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { approachMinimum, LeastSquares, type LeastSquaresResult } from '../../numeric/least-squares.ts';
import { CONVERSION_COUNT, CONVERSIONS } from '../event-data.ts';

/** Fills ∫ exp(−(E/R)(1/T − x0)) dt and its derivative by E from the start of the programme to each conversion, scan-major. */
export type CumulativeIntegrals = (energy: number, out: ArrheniusIntegral[]) => void;

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

/** Standard deviation of one α of a curve about the law when the scan sits right: noise and baseline, about half a per cent. */
const CURVE_SIGMA = 0.005;
/** Gauss–Newton steps for a scan's own shift: it is nearly linear. */
const SHIFT_STEPS = 6;
const SHIFT_SETTLED_K = 1e-5;

/**
 * Johnson–Mehl–Avrami–Kolmogorov on all scans of an event at once: α = 1 − exp[−(∫K dt)^n], K = exp(ln K0 − (E/R)(1/T − x0)), by
 * least squares on α at 0.05 … 0.95. x0 is the mean inverse temperature, so that E and ln K0 hardly correlate. It holds for site
 * saturation, or where nucleation and growth share one energy (Henderson 1979, J. Non-Cryst. Solids 30:301).
 *
 * One scan's whole curve moves together, so each scan has a temperature shift δ of its own, held by its scatter σ between scans: the sum
 * of squares is Σ_i [Σ_k (α̂(T_ik − δ_i) − α_k)²/σ_α² + δ_i²/σ_i²]. n then comes from the shape of each curve and E from where the curves
 * sit; without δ a scatter of 1.5 K on a chip read n 1.3 % low. δ acts on ln ∫K dt as −δ E/(R T²). The shifts are projected out (Kaufman
 * 1975), so the fit keeps three parameters.
 */
export class JmakFit {
  private readonly integrals: ArrheniusIntegral[];
  private readonly solver: LeastSquares;
  private readonly curveRows: number;
  private readonly lnI: Float64Array;
  private readonly perKelvin: Float64Array;
  /** each scan's shift at the last evaluation: the start of the next */
  private readonly shifts: Float64Array;
  private readonly slope = new Float64Array(CONVERSION_COUNT);

  /**
   * @param temperatureK at each conversion of each scan, scan-major; read at every fit   @param sigmaK scatter of each scan's temperature, K
   */
  constructor(
    private readonly sigmaK: ArrayLike<number>,
    private readonly x0: number,
    private readonly temperatureAt: (row: number) => number,
    private readonly cumulative: CumulativeIntegrals,
  ) {
    const scanCount = sigmaK.length;
    this.curveRows = scanCount * CONVERSION_COUNT;
    this.integrals = Array.from({ length: this.curveRows }, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
    this.lnI = new Float64Array(this.curveRows);
    this.perKelvin = new Float64Array(this.curveRows);
    this.shifts = new Float64Array(scanCount);
    // The last row of each scan is its shift against its scatter.
    this.solver = new LeastSquares(this.curveRows + scanCount, 3, (p, r, J) => this.evaluate(p, r, J));
  }

  private evaluate(p: Float64Array, r: Float64Array, J?: Float64Array): void {
    const [energy, lnK0, n] = p;
    if (!(energy > 0) || !(n > 0.05) || n > 50) {
      r.fill(Number.POSITIVE_INFINITY);
      return;
    }
    this.cumulative(energy, this.integrals);
    const c = energy / GAS_CONSTANT;
    for (let row = 0; row < this.curveRows; row++) {
      const T = this.temperatureAt(row);
      this.lnI[row] = lnK0 + Math.log(this.integrals[row].value);
      this.perKelvin[row] = -c / (T * T);
    }
    for (let i = 0; i < this.sigmaK.length; i++) this.evaluateScan(i, n, r, J);
  }

  /** Residuals of one scan at its best shift, with the Jacobian's part along the shift taken out. */
  private evaluateScan(i: number, n: number, r: Float64Array, J?: Float64Array): void {
    const { lnI, perKelvin, curveRows } = this;
    const from = i * CONVERSION_COUNT;
    const prior = CURVE_SIGMA / this.sigmaK[i];
    let shift = this.shifts[i];
    for (let step = 0; step < SHIFT_STEPS; step++) {
      let gg = prior * prior;
      let gr = prior * prior * shift;
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const X = Math.exp(n * (lnI[from + k] + perKelvin[from + k] * shift));
        const left = Math.exp(-X);
        const g = left * X * n * perKelvin[from + k];
        gg += g * g;
        gr += g * (1 - left - CONVERSIONS[k]);
      }
      const move = gr / gg;
      shift -= move;
      // The next move would be about this one squared over the width.
      if (Math.abs(move) < SHIFT_SETTLED_K) break;
    }
    this.shifts[i] = shift;
    let gg = prior * prior;
    let g0 = 0;
    let g1 = 0;
    let g2 = 0;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const row = from + k;
      const shifted = lnI[row] + perKelvin[row] * shift;
      const X = Math.exp(n * shifted);
      const left = Math.exp(-X);
      r[row] = 1 - left - CONVERSIONS[k];
      if (!J) continue;
      const slope = left * X;
      this.slope[k] = slope;
      const { value, byEnergy } = this.integrals[row];
      const T = this.temperatureAt(row);
      // d/dE of the scaled integral: the scale e^(x0 E/R) counts here, and the shift's share.
      J[row * 3] = slope * n * (byEnergy / value + this.x0 / GAS_CONSTANT - shift / (GAS_CONSTANT * T * T));
      J[row * 3 + 1] = slope * n;
      J[row * 3 + 2] = slope * shifted;
      const g = slope * n * perKelvin[row];
      gg += g * g;
      g0 += g * J[row * 3];
      g1 += g * J[row * 3 + 1];
      g2 += g * J[row * 3 + 2];
    }
    const last = curveRows + i;
    r[last] = prior * shift;
    if (!J) return;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const row = from + k;
      const g = (this.slope[k] * n * perKelvin[row]) / gg;
      J[row * 3] -= g * g0;
      J[row * 3 + 1] -= g * g1;
      J[row * 3 + 2] -= g * g2;
    }
    J[last * 3] = (-prior * g0) / gg;
    J[last * 3 + 1] = (-prior * g1) / gg;
    J[last * 3 + 2] = (-prior * g2) / gg;
  }

  /** From a rough start: the library's Levenberg–Marquardt first, then the analytic one to the last digit. */
  fitFromScratch(start: Float64Array): JmakEstimate {
    const near = approachMinimum(
      (p) => {
        const r = new Float64Array(this.curveRows + this.sigmaK.length);
        this.evaluate(p, r);
        // The library squares what it gets: a large finite value stands for "outside the model's range".
        return r.map((v) => (Number.isFinite(v) ? v : 1e3));
      },
      start,
      SCALE,
      this.curveRows + this.sigmaK.length,
    );
    const result = this.result(this.solver.solve(near, SCALE));
    return { ...result, quality: this.judge(result.fit.parameters) };
  }

  /** From a neighbouring answer (Monte Carlo draws). */
  fitFrom(start: Float64Array): JmakEstimate {
    return this.result(this.solver.solve(start, SCALE, 30, 1e-7));
  }

  private result(fit: LeastSquaresResult): JmakEstimate {
    const [energy, lnK0, exponent] = fit.parameters;
    return { energy, lnPrefactor: lnK0 + (energy * this.x0) / GAS_CONSTANT, exponent, fit };
  }

  private judge(parameters: Float64Array): JmakQuality {
    const r = new Float64Array(this.curveRows + this.sigmaK.length);
    this.evaluate(parameters, r);
    const rms = (v: Float64Array) => Math.sqrt(v.reduce((sum, x) => sum + x * x, 0) / v.length);
    return { residualRms: rms(r.subarray(0, this.curveRows)), shiftRms: rms(r.subarray(this.curveRows)) / CURVE_SIGMA };
  }
}
