/**
 * Solves symmetric positive definite systems of one size by Cholesky after scaling to unit diagonal; its buffers are made once, since the
 * fits of a Monte Carlo solve thousands of them.
 */
export class SymmetricSolver {
  private readonly scale: Float64Array;
  /** lower factor with the reciprocals of its diagonal */
  private readonly l: Float64Array;
  private readonly column: Float64Array;

  constructor(private readonly p: number) {
    this.scale = new Float64Array(p);
    this.l = new Float64Array(p * p);
    this.column = new Float64Array(p);
  }

  /**
   * @param matrix p × p, row-major, read only; its lower triangle is enough
   * @returns false when it is not positive definite to working precision; nothing may be solved then
   */
  factor(matrix: Float64Array): boolean {
    const { p, scale, l } = this;
    for (let i = 0; i < p; i++) {
      const d = matrix[i * p + i];
      if (!(d > 0) || !Number.isFinite(d)) return false;
      scale[i] = 1 / Math.sqrt(d);
    }
    for (let i = 0; i < p; i++) {
      for (let j = 0; j <= i; j++) {
        let sum = matrix[i * p + j] * scale[i] * scale[j];
        for (let k = 0; k < j; k++) sum -= l[i * p + k] * l[j * p + k];
        if (i === j) {
          if (!(sum >= 1e-14)) return false;
          l[i * p + i] = 1 / Math.sqrt(sum);
        } else {
          l[i * p + j] = sum * l[j * p + j];
        }
      }
    }
    return true;
  }

  /** L z = D v in place, L Lᵀ the scaled matrix and D its scale: zᵀ z = vᵀ M⁻¹ v, and the last z is v's part along the last parameter. */
  whiten(v: Float64Array): void {
    const { p, scale, l } = this;
    for (let i = 0; i < p; i++) {
      let sum = v[i] * scale[i];
      for (let k = 0; k < i; k++) sum -= l[i * p + k] * v[k];
      v[i] = sum * l[i * p + i];
    }
  }

  /** Right-hand side → solution, in place. */
  solve(rhs: Float64Array): void {
    this.whiten(rhs);
    const { p, scale, l } = this;
    for (let i = p - 1; i >= 0; i--) {
      let sum = rhs[i];
      for (let k = i + 1; k < p; k++) sum -= l[k * p + i] * rhs[k];
      rhs[i] = sum * l[i * p + i];
    }
    for (let i = 0; i < p; i++) rhs[i] *= scale[i];
  }

  /** @param out p × p, takes the inverse */
  invert(out: Float64Array): void {
    const { p, column } = this;
    for (let c = 0; c < p; c++) {
      column.fill(0);
      column[c] = 1;
      this.solve(column);
      for (let i = 0; i < p; i++) out[i * p + c] = column[i];
    }
  }
}

/** One a size: small systems are solved thousands of times a scan. */
const solvers: SymmetricSolver[] = [];

/**
 * Solves the normal equations of a small least-squares problem.
 * @param matrix p × p symmetric, row-major; overwritten by its inverse (in the original scale)
 * @param rhs length p; overwritten by the solution
 * @returns false when the matrix is not positive definite to working precision (nothing useful in the outputs then)
 */
export function solveSymmetric(matrix: Float64Array, rhs: Float64Array, p: number): boolean {
  solvers[p] ??= new SymmetricSolver(p);
  const solver = solvers[p];
  if (!solver.factor(matrix)) return false;
  solver.solve(rhs);
  solver.invert(matrix);
  return true;
}
