import { solveSymmetric } from '../numeric/linear-solve.ts';
import { type Foot, footAt } from './shape.ts';
import type { EventWindow } from './window.ts';

/** Terms of the baseline: p0 … p3, s0, s1 (see baseline.ts). */
export const TERMS = 6;
/** Highest power of u in a normal matrix of cubics. */
const POWERS = 7;
/** Half widths after which 1e-6 of an event's height is left. */
const FOOT_REACH = 10;

/**
 * Running sums over the bins of a window from which the normal equations of any flank follow without touching its bins again:
 * Σu^k (k ≤ 6), Σ y u^k (k ≤ 3), Σy², u = (t − peak)/width. The event's own foot is taken off beforehand, so that a flank may begin
 * where the foot is still a percent high.
 */
export class FlankSums {
  private readonly u: Float64Array;
  private readonly powers: Float64Array[];
  private readonly moments: Float64Array[];
  private readonly squares: Float64Array;
  /** Taken off y: keeps the sums of squares small beside the noise */
  readonly level: number;
  /** of one bin, white part */
  readonly noiseVariance: number;

  constructor(
    w: EventWindow,
    readonly peakS: number,
    readonly widthS: number,
    foot: Foot | undefined,
  ) {
    const n = w.t.length;
    this.u = new Float64Array(n);
    this.powers = Array.from({ length: POWERS }, () => new Float64Array(n + 1));
    this.moments = Array.from({ length: 4 }, () => new Float64Array(n + 1));
    this.squares = new Float64Array(n + 1);
    this.level = w.y[0];
    this.noiseVariance = w.noise ** 2;
    const { powers, moments, squares } = this;
    const footS = foot ? foot.peakS - FOOT_REACH * foot.leftS : 0;
    for (let i = 0; i < n; i++) {
      const u = (w.t[i] - peakS) / widthS;
      this.u[i] = u;
      const y = w.y[i] - this.level - (foot && u < 0 && w.t[i] > footS ? footAt(foot, w.t[i]) : 0);
      let power = 1;
      for (let k = 0; k < POWERS; k++) {
        powers[k][i + 1] = powers[k][i] + power;
        if (k < 4) moments[k][i + 1] = moments[k][i] + power * y;
        power *= u;
      }
      squares[i + 1] = squares[i] + y * y;
    }
  }

  /** Length of bins [from, to), widths. */
  lengthOf([from, to]: readonly [number, number]): number {
    return to - from < 2 ? 0 : this.u[to - 1] - this.u[from];
  }

  /** Normal matrix and right-hand side of all six terms over both flanks, y counted from `level`. @returns Σy² */
  fillNormal(
    left: readonly [number, number],
    right: readonly [number, number],
    normal: Float64Array,
    rhs: Float64Array,
    leftWeight: number,
  ): number {
    const between = (sums: Float64Array, [from, to]: readonly [number, number]) =>
      to > from ? sums[to] - sums[from] : 0;
    const { powers, moments, squares } = this;
    const p = TERMS;
    for (let i = 0; i < 4; i++) {
      rhs[i] = leftWeight * between(moments[i], left) + between(moments[i], right);
      for (let j = 0; j < 4; j++)
        normal[i * p + j] = leftWeight * between(powers[i + j], left) + between(powers[i + j], right);
    }
    for (let i = 0; i < 2; i++) {
      rhs[4 + i] = between(moments[i], right);
      for (let j = 0; j < 4; j++) {
        normal[(4 + i) * p + j] = between(powers[i + j], right);
        normal[j * p + 4 + i] = normal[(4 + i) * p + j];
      }
      for (let j = 0; j < 2; j++) normal[(4 + i) * p + 4 + j] = between(powers[i + j], right);
    }
    return leftWeight * between(squares, left) + between(squares, right);
  }

  /** Residual variance of a polynomial of `degree` over bins [from, to): what a smooth baseline cannot be. */
  scatter([from, to]: readonly [number, number], degree: number): number {
    const p = degree + 1;
    if (to - from <= p) return 0;
    const normal = new Float64Array(p * p);
    const rhs = new Float64Array(p);
    for (let i = 0; i < p; i++) {
      rhs[i] = this.moments[i][to] - this.moments[i][from];
      for (let j = 0; j < p; j++) normal[i * p + j] = this.powers[i + j][to] - this.powers[i + j][from];
    }
    const before = Float64Array.from(rhs);
    if (!solveSymmetric(normal, rhs, p)) return 0;
    let chi = this.squares[to] - this.squares[from];
    for (let i = 0; i < p; i++) chi -= rhs[i] * before[i];
    return Math.max(0, chi) / (to - from - p);
  }
}
