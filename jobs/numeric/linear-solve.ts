/** Working room of small systems: they are solved thousands of times a scan, and three arrays each time cost more than the arithmetic. */
const SMALL = 8;
const smallScale = new Float64Array(SMALL);
const smallFactor = new Float64Array(SMALL * SMALL);
const smallColumn = new Float64Array(SMALL);

/**
 * Solves the normal equations of a small least-squares problem by Cholesky after scaling to unit diagonal.
 * @param matrix p × p symmetric, row-major; overwritten by its inverse (in the original scale)
 * @param rhs length p; overwritten by the solution
 * @returns false when the matrix is not positive definite to working precision (nothing useful in the outputs then)
 */
export function solveSymmetric(matrix: Float64Array, rhs: Float64Array, p: number): boolean {
  const small = p <= SMALL;
  const scale = small ? smallScale : new Float64Array(p);
  for (let i = 0; i < p; i++) {
    const d = matrix[i * p + i];
    if (!(d > 0) || !Number.isFinite(d)) return false;
    scale[i] = 1 / Math.sqrt(d);
  }
  const l = small ? smallFactor : new Float64Array(p * p);
  for (let i = 0; i < p; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * p + j] * scale[i] * scale[j];
      for (let k = 0; k < j; k++) sum -= l[i * p + k] * l[j * p + k];
      if (i === j) {
        if (sum < 1e-14) return false;
        l[i * p + i] = Math.sqrt(sum);
      } else {
        l[i * p + j] = sum / l[j * p + j];
      }
    }
  }
  // Columns of the inverse, then the solution as inverse × right-hand side: p is at most a handful.
  const column = small ? smallColumn : new Float64Array(p);
  for (let c = 0; c < p; c++) {
    for (let i = 0; i < p; i++) {
      let sum = i === c ? 1 : 0;
      for (let k = 0; k < i; k++) sum -= l[i * p + k] * column[k];
      column[i] = sum / l[i * p + i];
    }
    for (let i = p - 1; i >= 0; i--) {
      let sum = column[i];
      for (let k = i + 1; k < p; k++) sum -= l[k * p + i] * column[k];
      column[i] = sum / l[i * p + i];
    }
    for (let i = 0; i < p; i++) matrix[i * p + c] = column[i] * scale[i] * scale[c];
  }
  for (let i = 0; i < p; i++) {
    column[i] = 0;
    for (let k = 0; k < p; k++) column[i] += matrix[i * p + k] * rhs[k];
  }
  for (let i = 0; i < p; i++) rhs[i] = column[i];
  return true;
}
