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
  /** root mean square residual in α */
  residualRms: number;
  fit: LeastSquaresResult;
}

/** Size of a meaningful change of (E, ln K at x0, n). */
const SCALE = Float64Array.of(1e5, 1, 1);

/**
 * Johnson–Mehl–Avrami–Kolmogorov on all scans of an event at once: α = 1 − exp[−(∫K dt)^n], K = exp(ln K0 − (E/R)(1/T − x0)), by
 * least squares on α at 0.05 … 0.95. x0 is the mean inverse temperature, so that E and ln K0 hardly correlate. It holds for site
 * saturation, or where nucleation and growth share one energy (Henderson 1979, J. Non-Cryst. Solids 30:301).
 */
export class JmakFit {
  private readonly integrals: ArrheniusIntegral[];
  private readonly rootWeights: Float64Array;
  private readonly solver: LeastSquares;
  private readonly rows: number;

  /** @param weights a scan, ∝ 1/variance; only ratios matter */
  constructor(
    scanCount: number,
    weights: ArrayLike<number>,
    private readonly x0: number,
    private readonly cumulative: CumulativeIntegrals,
  ) {
    this.rows = scanCount * CONVERSION_COUNT;
    this.integrals = Array.from({ length: this.rows }, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
    let sum = 0;
    for (let i = 0; i < scanCount; i++) sum += weights[i];
    this.rootWeights = Float64Array.from({ length: scanCount }, (_, i) => Math.sqrt((weights[i] * scanCount) / sum));
    this.solver = new LeastSquares(this.rows, 3, (p, r, J) => this.evaluate(p, r, J));
  }

  private evaluate(p: Float64Array, r: Float64Array, J?: Float64Array): void {
    const [energy, lnK0, n] = p;
    if (!(energy > 0) || !(n > 0.05) || n > 50) {
      r.fill(Number.POSITIVE_INFINITY);
      return;
    }
    this.cumulative(energy, this.integrals);
    for (let row = 0; row < this.rows; row++) {
      const { value, byEnergy } = this.integrals[row];
      const w = this.rootWeights[(row / CONVERSION_COUNT) | 0];
      const lnI = lnK0 + Math.log(value);
      const X = Math.exp(n * lnI);
      const left = Math.exp(-X);
      r[row] = w * (1 - left - CONVERSIONS[row % CONVERSION_COUNT]);
      if (!J) continue;
      const slope = w * left * X;
      // d/dE of the scaled integral: the scale e^(x0 E/R) counts here.
      J[row * 3] = slope * n * (byEnergy / value + this.x0 / GAS_CONSTANT);
      J[row * 3 + 1] = slope * n;
      J[row * 3 + 2] = slope * lnI;
    }
  }

  /** From a rough start: the library's Levenberg–Marquardt first, then the analytic one to the last digit. */
  fitFromScratch(start: Float64Array): JmakEstimate {
    const near = approachMinimum(
      (p) => {
        const r = new Float64Array(this.rows);
        this.evaluate(p, r);
        // The library squares what it gets: a large finite value stands for "outside the model's range".
        return r.map((v) => (Number.isFinite(v) ? v : 1e3));
      },
      start,
      SCALE,
      this.rows,
    );
    return this.result(this.solver.solve(near, SCALE));
  }

  /** From a neighbouring answer (Monte Carlo draws). */
  fitFrom(start: Float64Array): JmakEstimate {
    return this.result(this.solver.solve(start, SCALE, 30, 1e-7));
  }

  private result(fit: LeastSquaresResult): JmakEstimate {
    const [energy, lnK0, exponent] = fit.parameters;
    return {
      energy,
      lnPrefactor: lnK0 + (energy * this.x0) / GAS_CONSTANT,
      exponent,
      residualRms: Math.sqrt(fit.sumOfSquares / this.rows),
      fit,
    };
  }
}
