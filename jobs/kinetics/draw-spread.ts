import { studentQuantile } from '../numeric/distributions.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';
import { mean } from '../numeric/statistics.ts';

/** What was drawn, beside what came of it: one row a draw. */
export interface DrawCauses {
  /** offset and lag error of each instrument: sizes that are given, not estimated */
  calibration: ArrayLike<number>;
  /** shift of each scan, K: its size was estimated from the scatter of its instrument's scans */
  shifts: ArrayLike<number>;
}

/**
 * Between two answers that are each off where few degrees of freedom meet a part of given size: quantiles added in quadrature (as Behrens &
 * Fisher have it; too wide, 98.7 % for equal parts and one degree) and one t with the effective degrees of freedom of the sum (Satterthwaite
 * 1946, Biometrics Bulletin 2:110; too narrow, 87–93 %). This weight of the first in the logarithm keeps 94–97 % from two degrees on.
 */
const QUADRATURE_SHARE = 1 / 3;

/**
 * Half widths of 95 % intervals from Monte Carlo draws. The variance of a result is split by regression on its causes: calibration
 * errors, whose size is given, and the scatter of each instrument's scans, whose size was estimated from few of them and has so many
 * degrees of freedom. One t for the whole made intervals twice too wide where the lag error rules, and too narrow where two scans of a
 * second instrument rule.
 */
export class DrawSpread {
  private readonly inverse: Float64Array;
  private columns: Float64Array[] = [];
  /** which part of the variance each column belongs to */
  private readonly part: number[] = [];
  /** degrees of freedom of each part: the one that no cause explains first; infinite for calibration errors */
  private readonly degrees: number[];
  private readonly variance: Float64Array;

  /**
   * @param causes in the order of the draws   @param degrees ν = n − p of the whole, at least 1
   * @param scanDegrees degrees of freedom behind the scatter of each scan's instrument
   */
  constructor(causes: readonly DrawCauses[], degrees: number, scanDegrees: readonly number[]) {
    this.degrees = [Math.max(1, degrees), Number.POSITIVE_INFINITY];
    const take = (cause: keyof DrawCauses, degreesOf: (k: number) => number) => {
      for (let k = 0; k < (causes.length > 0 ? causes[0][cause].length : 0); k++) {
        const column = new Float64Array(causes.length);
        for (let d = 0; d < column.length; d++) column[d] = causes[d][cause][k];
        const m = mean(column);
        let largest = 0;
        for (let d = 0; d < column.length; d++) {
          column[d] -= m;
          largest = Math.max(largest, Math.abs(column[d]));
        }
        if (largest < 1e-12) continue;
        const nu = degreesOf(k);
        if (!this.degrees.includes(nu)) this.degrees.push(nu);
        this.columns.push(column);
        this.part.push(this.degrees.indexOf(nu));
      }
    };
    take('calibration', () => Number.POSITIVE_INFINITY);
    take('shifts', (k) => Math.max(1, scanDegrees[k]));
    this.variance = new Float64Array(this.degrees.length);
    const p = this.columns.length;
    const normal = new Float64Array(p * p);
    for (let i = 0; i < p; i++) {
      for (let j = 0; j <= i; j++) {
        const sum = product(this.columns[i], this.columns[j]);
        normal[i * p + j] = sum;
        normal[j * p + i] = sum;
      }
    }
    // Too few draws to tell the causes apart: everything is counted as scatter.
    if (causes.length < 2 * p + 10 || !solveSymmetric(normal, new Float64Array(p), p)) this.columns = [];
    this.inverse = normal;
  }

  /** Half width for values given one a draw in the order of the constructor's; NaN where they have no spread to speak of. */
  halfWidth(values: ArrayLike<number>): number {
    const { columns, inverse, part, variance } = this;
    const p = columns.length;
    const n = values.length;
    const m = mean(values);
    const centred = new Float64Array(n);
    for (let d = 0; d < n; d++) centred[d] = values[d] - m;
    const total = product(centred, centred);
    const moments = new Float64Array(p);
    for (let i = 0; i < p; i++) moments[i] = product(columns[i], centred);
    variance.fill(0);
    let explained = 0;
    for (let i = 0; i < p; i++) {
      let slope = 0;
      for (let j = 0; j < p; j++) slope += inverse[i * p + j] * moments[j];
      // The columns are drawn independently: each explains slope × moment, apart from chance.
      const share = Math.max(0, slope * moments[i]);
      explained += share;
      variance[part[i]] += share;
    }
    if (explained > total) for (let g = 0; g < variance.length; g++) variance[g] *= total / explained;
    variance[0] += Math.max(0, total - explained);
    return Math.sqrt(squaredHalfWidth(variance, this.degrees) / (n - 1));
  }
}

/** Σ a b, in two sums side by side: one alone waits for itself. */
function product(a: Float64Array, b: Float64Array): number {
  let even = 0;
  let odd = 0;
  let d = 0;
  for (; d + 1 < a.length; d += 2) {
    even += a[d] * b[d];
    odd += a[d + 1] * b[d + 1];
  }
  return d < a.length ? even + odd + a[d] * b[d] : even + odd;
}

/** (95 % half width)² of a sum of independent parts, each with the degrees of freedom behind its variance (infinite: given). */
export function squaredHalfWidth(variance: ArrayLike<number>, degrees: ArrayLike<number>): number {
  let total = 0;
  let quadrature = 0;
  let perDegree = 0;
  for (let g = 0; g < variance.length; g++) {
    const v = variance[g];
    total += v;
    quadrature += v * studentFactor(degrees[g]) ** 2;
    perDegree += v ** 2 / degrees[g];
  }
  if (!(total > 0)) return 0;
  const effective = total * studentFactor(total ** 2 / perDegree) ** 2;
  return quadrature ** QUADRATURE_SHARE * effective ** (1 - QUADRATURE_SHARE);
}

/** ln t(0.975, ν) at 1/ν = 0, 1/256 … 1: a row of the table needs several, the quantile itself takes a search. */
const STEPS = 256;
let table: Float64Array | undefined;

/** t(0.975, ν) for ν ≥ 1, normal for infinite ν; interpolated, to 1e-5 of itself. */
export function studentFactor(degrees: number): number {
  table ??= Float64Array.from({ length: STEPS + 1 }, (_, i) => Math.log(studentQuantile(0.975, i ? STEPS / i : 1e9)));
  const at = Math.min(1, 1 / degrees) * STEPS;
  const i = Math.min(STEPS - 1, Math.floor(at));
  return Math.exp(table[i] + (at - i) * (table[i + 1] - table[i]));
}
