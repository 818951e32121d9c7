import { levenbergMarquardt } from 'ml-levenberg-marquardt';
import { SymmetricSolver } from './linear-solve.ts';

/** A model with analytic derivatives: fills residuals (length m) and, row-major, ∂residual/∂parameter (m × p). */
export type Residuals = (parameters: Float64Array, residuals: Float64Array, jacobian: Float64Array) => void;

export interface Minimum {
  parameters: Float64Array;
  sumOfSquares: number;
  converged: boolean;
  message: string;
  evaluations: number;
}

export interface LeastSquaresResult extends Minimum {
  /** p × p, residual variance × (JᵀJ)⁻¹; undefined when the normal matrix is singular */
  covariance?: Float64Array;
}

const SMALLEST_STEP = 1e-9;

/**
 * Damped Gauss–Newton (Levenberg 1944, Marquardt 1963) with analytic Jacobian, all buffers made once: for the thousands of warm-started
 * fits of a Monte Carlo, and to bring a rougher answer to its last digit with a covariance.
 * Stops when every parameter moves by less than 1e-9 of its scale (`scale`, the size of a meaningful change).
 */
export class LeastSquares {
  private residuals: Float64Array;
  private jacobian: Float64Array;
  private trialResiduals: Float64Array;
  private trialJacobian: Float64Array;
  private readonly trial: Float64Array;
  private readonly normal: Float64Array;
  private readonly gradient: Float64Array;
  private readonly solver: SymmetricSolver;

  constructor(
    private readonly rows: number,
    private readonly p: number,
    private readonly model: Residuals,
  ) {
    this.residuals = new Float64Array(rows);
    this.trialResiduals = new Float64Array(rows);
    this.jacobian = new Float64Array(rows * p);
    this.trialJacobian = new Float64Array(rows * p);
    this.trial = new Float64Array(p);
    this.normal = new Float64Array(p * p);
    this.gradient = new Float64Array(p);
    this.solver = new SymmetricSolver(p);
  }

  /**
   * The minimum alone. @param tolerance step ÷ scale at which the fit has converged
   * @param lookBack false for draws: the last step is taken without asking what it leaves, and the sum of squares is that before it
   */
  minimise(
    start: Float64Array,
    scale: Float64Array,
    maxIterations = 50,
    tolerance = SMALLEST_STEP,
    lookBack = true,
  ): Minimum {
    const { p, rows, trial, normal, gradient, solver } = this;
    const parameters = new Float64Array(p);
    parameters.set(start);
    this.model(parameters, this.residuals, this.jacobian);
    let evaluations = 1;
    let sum = sumOfSquares(this.residuals);
    let damping = 0;
    let converged = false;
    let message = `not converged after ${maxIterations} iterations`;
    for (let iteration = 0; iteration < maxIterations; iteration++) {
      if (!Number.isFinite(sum)) {
        message = 'the model gave no finite value at the start';
        break;
      }
      makeNormal(this.residuals, this.jacobian, rows, p, normal, gradient);
      for (let i = 0; i < p; i++) normal[i * p + i] *= 1 + damping;
      if (!solver.factor(normal)) {
        message = 'the normal matrix is singular: the data do not determine every parameter';
        break;
      }
      solver.solve(gradient);
      let largest = 0;
      for (let i = 0; i < p; i++) {
        trial[i] = parameters[i] - gradient[i];
        largest = Math.max(largest, Math.abs(gradient[i]) / scale[i]);
      }
      if (!lookBack && largest < tolerance) {
        parameters.set(trial);
        converged = true;
        message = 'last step below tolerance';
        break;
      }
      this.model(trial, this.trialResiduals, this.trialJacobian);
      evaluations++;
      const sum2 = sumOfSquares(this.trialResiduals);
      // A rise within rounding at a step already below tolerance is convergence, not failure.
      if (sum2 <= sum || (largest < tolerance && Number.isFinite(sum2))) {
        parameters.set(trial);
        [this.residuals, this.trialResiduals] = [this.trialResiduals, this.residuals];
        [this.jacobian, this.trialJacobian] = [this.trialJacobian, this.jacobian];
        sum = sum2;
        damping = damping < 1e-6 ? 0 : damping / 10;
        if (largest < tolerance) {
          converged = true;
          message = `last step ${largest.toExponential(1)} of the parameters' scale`;
          break;
        }
      } else {
        if (damping > 1e8) {
          message = 'no step lowers the residual any more';
          converged = largest < 1e-6;
          break;
        }
        damping = damping === 0 ? 1e-3 : damping * 10;
      }
    }
    return { parameters, sumOfSquares: sum, converged, message, evaluations };
  }

  /** The minimum with its covariance. */
  solve(start: Float64Array, scale: Float64Array, maxIterations = 50, tolerance = SMALLEST_STEP): LeastSquaresResult {
    const { p, rows, normal, gradient, solver } = this;
    const minimum = this.minimise(start, scale, maxIterations, tolerance);
    makeNormal(this.residuals, this.jacobian, rows, p, normal, gradient);
    if (!solver.factor(normal)) return minimum;
    const covariance = new Float64Array(p * p);
    solver.invert(covariance);
    const variance = minimum.sumOfSquares / Math.max(1, rows - p);
    for (let i = 0; i < covariance.length; i++) covariance[i] *= variance;
    return { ...minimum, covariance };
  }
}

function sumOfSquares(r: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < r.length; i++) sum += r[i] * r[i];
  return sum;
}

function makeNormal(
  r: Float64Array,
  J: Float64Array,
  rows: number,
  p: number,
  normal: Float64Array,
  gradient: Float64Array,
): void {
  normal.fill(0);
  gradient.fill(0);
  for (let k = 0; k < rows; k++) {
    for (let i = 0; i < p; i++) {
      const v = J[k * p + i];
      if (v === 0) continue;
      gradient[i] += v * r[k];
      for (let j = 0; j <= i; j++) normal[i * p + j] += v * J[k * p + j];
    }
  }
  for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) normal[j * p + i] = normal[i * p + j];
}

/**
 * From a rough start to the neighbourhood of the minimum with the library's Levenberg–Marquardt (numeric derivatives, adaptive
 * damping); `LeastSquares` then takes over with analytic ones. Keeps the start when the library finds nothing better.
 * @param model residuals for a parameter vector, length m
 */
export function approachMinimum(
  model: (parameters: Float64Array) => Float64Array,
  start: Float64Array,
  scale: Float64Array,
  rows: number,
): Float64Array {
  const index = Array.from({ length: rows }, (_, i) => i);
  const fitted = levenbergMarquardt(
    { x: index, y: new Array<number>(rows).fill(0) },
    (scaled) => {
      const r = model(Float64Array.from(scaled, (v, i) => v * scale[i]));
      return (i) => r[i];
    },
    {
      initialValues: Array.from(start, (v, i) => v / scale[i]),
      damping: 1e-3,
      maxIterations: 30,
      errorTolerance: 1e-12,
      gradientDifference: 1e-4,
    },
  );
  const found = Float64Array.from(fitted.parameterValues, (v, i) => v * scale[i]);
  const before = sumOfSquares(model(start));
  const after = found.every(Number.isFinite) ? sumOfSquares(model(found)) : Number.POSITIVE_INFINITY;
  return after < before ? found : start;
}
