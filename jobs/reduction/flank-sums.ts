import { solveSymmetric } from '../numeric/linear-solve.ts';
import { type Foot, footAt } from './shape.ts';
import type { EventWindow } from './window.ts';

/** Terms of the baseline: p0 … p3, s0, s1 (see baseline.ts). */
export const TERMS = 6;
/** Highest power of u in a normal matrix of cubics. */
const POWERS = 7;
/** Where the other sums stand in a row of them, and its length. */
const MOMENTS = POWERS;
const SQUARES = MOMENTS + 4;
const SUMS = SQUARES + 1;
/** Half widths after which 1e-6 of an event's height is left. */
const FOOT_REACH = 10;
/** Working room of `scatter`. */
const cubic = new Float64Array(16);
const quadratic = new Float64Array(9);
const solution = new Float64Array(4);

/**
 * Running sums over the bins of a window from which the normal equations of any flank follow without touching its bins again:
 * Σu^k (k ≤ 6), Σ y u^k (k ≤ 3), Σy², u = (t − peak)/width. The event's own foot is taken off beforehand, so that a flank may begin
 * where the foot is still a percent high.
 */
export class FlankSums {
  private readonly u: Float64Array;
  /** A row a bin boundary: Σ over the bins before it of u⁰ … u⁶, y u⁰ … y u³, y² */
  private readonly sums: Float64Array;
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
    const u = new Float64Array(n);
    const sums = new Float64Array((n + 1) * SUMS);
    const level = w.y[0];
    const footS = foot ? foot.peakS - FOOT_REACH * foot.leftS : 0;
    for (let i = 0, at = 0; i < n; i++, at += SUMS) {
      const v = (w.t[i] - peakS) / widthS;
      u[i] = v;
      const y = w.y[i] - level - (foot && v < 0 && w.t[i] > footS ? footAt(foot, w.t[i]) : 0);
      let power = 1;
      for (let k = at; k < at + POWERS; k++) {
        sums[k + SUMS] = sums[k] + power;
        power *= v;
      }
      power = y;
      for (let k = at + MOMENTS; k < at + SQUARES; k++) {
        sums[k + SUMS] = sums[k] + power;
        power *= v;
      }
      sums[at + SUMS + SQUARES] = sums[at + SQUARES] + y * y;
    }
    this.u = u;
    this.sums = sums;
    this.level = level;
    this.noiseVariance = w.noise ** 2;
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
    const { sums } = this;
    const p = TERMS;
    const [l0, l1] = [left[0] * SUMS, Math.max(left[0], left[1]) * SUMS];
    const [r0, r1] = [right[0] * SUMS, Math.max(right[0], right[1]) * SUMS];
    for (let i = 0; i < 4; i++) {
      const m = MOMENTS + i;
      rhs[i] = leftWeight * (sums[l1 + m] - sums[l0 + m]) + sums[r1 + m] - sums[r0 + m];
      for (let j = 0; j < 4; j++) {
        const k = i + j;
        normal[i * p + j] = leftWeight * (sums[l1 + k] - sums[l0 + k]) + sums[r1 + k] - sums[r0 + k];
      }
    }
    for (let i = 0; i < 2; i++) {
      rhs[4 + i] = sums[r1 + MOMENTS + i] - sums[r0 + MOMENTS + i];
      for (let j = 0; j < 4; j++) {
        normal[(4 + i) * p + j] = sums[r1 + i + j] - sums[r0 + i + j];
        normal[j * p + 4 + i] = normal[(4 + i) * p + j];
      }
      for (let j = 0; j < 2; j++) normal[(4 + i) * p + 4 + j] = sums[r1 + i + j] - sums[r0 + i + j];
    }
    return leftWeight * (sums[l1 + SQUARES] - sums[l0 + SQUARES]) + sums[r1 + SQUARES] - sums[r0 + SQUARES];
  }

  /** Residual variance of a polynomial of `degree` over bins [from, to): what a smooth baseline cannot be. */
  scatter([from, to]: readonly [number, number], degree: 2 | 3): number {
    const p = degree + 1;
    if (to - from <= p) return 0;
    const { sums } = this;
    const [a, b] = [from * SUMS, to * SUMS];
    const normal = degree === 3 ? cubic : quadratic;
    const between = (k: number) => sums[b + k] - sums[a + k];
    for (let i = 0; i < p; i++) {
      solution[i] = between(MOMENTS + i);
      for (let j = 0; j < p; j++) normal[i * p + j] = between(i + j);
    }
    if (!solveSymmetric(normal, solution, p)) return 0;
    let chi = between(SQUARES);
    for (let i = 0; i < p; i++) chi -= solution[i] * between(MOMENTS + i);
    return Math.max(0, chi) / (to - from - p);
  }
}
