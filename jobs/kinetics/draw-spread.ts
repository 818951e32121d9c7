import { studentQuantile } from '../numeric/distributions.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';
import { mean } from '../numeric/statistics.ts';

/**
 * Half widths of 95 % intervals from Monte Carlo draws whose variance has two parts: the scatter between scans, known from ν = n − p
 * residual degrees of freedom only, and the calibration errors, whose size is given. Student's t belongs to the first part alone: with
 * the variance split by regression on the calibration errors drawn, the Welch–Satterthwaite degrees of freedom of the sum are
 * ν (V/V_scatter)² (Welch 1947, Biometrika 34:28). Without the split, few scans and a large lag error gave intervals twice too wide.
 */
export class DrawSpread {
  private readonly inverse: Float64Array;
  private readonly p: number;
  private readonly centred: Float64Array[];

  /**
   * @param calibrationErrors one array a draw: the offset and lag errors drawn for each instrument, any units
   * @param degrees residual degrees of freedom ν of the scatter, at least 1
   */
  constructor(
    calibrationErrors: readonly Float64Array[],
    private readonly degrees: number,
  ) {
    const draws = calibrationErrors.length;
    const varied = Array.from(calibrationErrors[0] ?? [], (_, c) => c).filter((c) =>
      calibrationErrors.some((e) => e[c] !== calibrationErrors[0][c]),
    );
    this.centred = varied.map((c) => {
      const column = Float64Array.from(calibrationErrors, (e) => e[c]);
      const m = mean(column);
      return column.map((v) => v - m);
    });
    this.p = draws > 4 * varied.length + 4 ? varied.length : 0;
    const normal = new Float64Array(this.p * this.p);
    for (let i = 0; i < this.p; i++) {
      for (let j = 0; j < this.p; j++) {
        for (let d = 0; d < draws; d++) normal[i * this.p + j] += this.centred[i][d] * this.centred[j][d];
      }
    }
    if (this.p > 0 && !solveSymmetric(normal, new Float64Array(this.p), this.p)) this.p = 0;
    this.inverse = normal;
  }

  /** t(0.975, ν_eff) × standard deviation of the values, one a draw in the order of the constructor's. */
  halfWidth(values: readonly number[]): number {
    const { p, centred, inverse } = this;
    const n = values.length;
    const m = mean(values);
    let total = 0;
    for (const v of values) total += (v - m) ** 2;
    const moments = new Float64Array(p);
    for (let i = 0; i < p; i++) for (let d = 0; d < n; d++) moments[i] += centred[i][d] * (values[d] - m);
    let explained = 0;
    for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) explained += moments[i] * inverse[i * p + j] * moments[j];
    const variance = total / (n - 1);
    // Adjusted for the part that p regressors explain of pure chance.
    const scatter = Math.min(variance, Math.max(0, (total - explained) / Math.max(1, n - 1 - p)));
    if (!(variance > 0)) return variance === 0 ? 0 : Number.NaN;
    const degrees = Math.min(1e6, this.degrees * (variance / Math.max(scatter, 1e-12 * variance)) ** 2);
    return studentQuantile(0.975, degrees) * Math.sqrt(variance);
  }
}
