import { studentQuantile } from '../numeric/distributions.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';
import { mean } from '../numeric/statistics.ts';

/** What was drawn, beside what came of it: one row a draw. */
export interface DrawCauses {
  /** offset and lag error of each instrument: sizes that are given, not estimated */
  calibration: Float64Array;
  /** shift of each scan, K: its size was estimated from the scatter of its instrument's scans */
  shifts: Float64Array;
}

/** Normal quantile 0.975. */
const NORMAL = 1.959964;

/**
 * Half widths of 95 % intervals from Monte Carlo draws. The variance of a result is split by regression on its causes: calibration
 * errors, whose size is given, get the normal quantile; the scatter of each instrument's scans, whose size was estimated from few of
 * them, gets Student's t with that instrument's share of the residual degrees of freedom; the parts are added in quadrature. One t for
 * the whole made intervals twice too wide where the lag error rules, and too narrow where two scans of a second instrument rule.
 */
export class DrawSpread {
  private readonly inverse: Float64Array;
  private readonly columns: Float64Array[] = [];
  /** squared quantile that goes with each column */
  private readonly quantiles: number[] = [];
  private readonly rest: number;

  /**
   * @param causes in the order of the draws   @param degrees ν = n − p of the whole, at least 1
   * @param scanDegrees degrees of freedom behind the scatter of each scan's instrument
   */
  constructor(causes: readonly DrawCauses[], degrees: number, scanDegrees: readonly number[]) {
    this.rest = studentQuantile(0.975, Math.max(1, degrees)) ** 2;
    const take = (of: (c: DrawCauses) => Float64Array, quantile: (k: number) => number) => {
      for (let k = 0; k < (causes.length > 0 ? of(causes[0]).length : 0); k++) {
        const column = Float64Array.from(causes, (c) => of(c)[k]);
        const m = mean(column);
        const centred = column.map((v) => v - m);
        if (centred.every((v) => Math.abs(v) < 1e-12)) continue;
        this.columns.push(centred);
        this.quantiles.push(quantile(k) ** 2);
      }
    };
    take(
      (c) => c.calibration,
      () => NORMAL,
    );
    const known = new Map<number, number>();
    take(
      (c) => c.shifts,
      (k) => {
        const nu = Math.max(1, scanDegrees[k]);
        if (!known.has(nu)) known.set(nu, studentQuantile(0.975, nu));
        return known.get(nu)!;
      },
    );
    const p = this.columns.length;
    const normal = new Float64Array(p * p);
    for (let i = 0; i < p; i++) {
      for (let j = 0; j <= i; j++) {
        let sum = 0;
        for (let d = 0; d < causes.length; d++) sum += this.columns[i][d] * this.columns[j][d];
        normal[i * p + j] = sum;
        normal[j * p + i] = sum;
      }
    }
    // Too few draws to tell the causes apart: everything is counted as scatter.
    if (causes.length < 2 * p + 10 || !solveSymmetric(normal, new Float64Array(p), p)) this.columns = [];
    this.inverse = normal;
  }

  /** Half width for values given one a draw in the order of the constructor's; NaN where they have no spread to speak of. */
  halfWidth(values: readonly number[]): number {
    const { columns, inverse, quantiles } = this;
    const p = columns.length;
    const n = values.length;
    const m = mean(values);
    let total = 0;
    for (const v of values) total += (v - m) ** 2;
    const moments = new Float64Array(p);
    for (let i = 0; i < p; i++) for (let d = 0; d < n; d++) moments[i] += columns[i][d] * (values[d] - m);
    let sum = 0;
    let explained = 0;
    for (let i = 0; i < p; i++) {
      let slope = 0;
      for (let j = 0; j < p; j++) slope += inverse[i * p + j] * moments[j];
      // The columns are drawn independently: each explains slope × moment, apart from chance.
      const part = Math.max(0, slope * moments[i]);
      explained += part;
      sum += quantiles[i] * part;
    }
    const scale = explained > total ? total / explained : 1;
    return Math.sqrt((scale * sum + this.rest * Math.max(0, total - explained)) / (n - 1));
  }
}
