/**
 * Adaptive explicit Runge–Kutta of order 5(4): Dormand & Prince, J. Comput. Appl. Math. 6 (1980) 19, with local
 * extrapolation. Every requested time is the end of a step, so no interpolation error enters the answer.
 */
export type Derivative = (t: number, y: Float64Array, out: Float64Array) => void;

export interface IntegratorSettings {
  relativeTolerance: number;
  absoluteTolerance: number;
}

export const TIGHT: IntegratorSettings = { relativeTolerance: 1e-11, absoluteTolerance: 1e-14 };

const NODES = [0, 1 / 5, 3 / 10, 4 / 5, 8 / 9, 1, 1];
const STAGES: readonly (readonly number[])[] = [
  [],
  [1 / 5],
  [3 / 40, 9 / 40],
  [44 / 45, -56 / 15, 32 / 9],
  [19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729],
  [9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656],
  [35 / 384, 0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84],
];
/** Fifth-order weights minus the embedded fourth-order ones. */
const ERROR_WEIGHTS = [71 / 57600, 0, -71 / 16695, 71 / 1920, -17253 / 339200, 22 / 525, -1 / 40];
/** Far above any scan here; a run that needs more is not converging. */
const STEP_LIMIT = 5_000_000;

export interface Stepper {
  /** Advances from (t, y) by h into `next`; returns nothing but fills `error` (absolute, per component). */
  step(t: number, y: Float64Array, h: number, next: Float64Array, error: Float64Array): void;
}

export function createStepper(derivative: Derivative, dimension: number): Stepper {
  const k = STAGES.map(() => new Float64Array(dimension));
  const trial = new Float64Array(dimension);
  return {
    step(t, y, h, next, error) {
      for (let s = 0; s < 7; s++) {
        const row = STAGES[s];
        for (let i = 0; i < dimension; i++) {
          let sum = 0;
          for (let j = 0; j < s; j++) sum += row[j] * k[j][i];
          trial[i] = y[i] + h * sum;
        }
        derivative(t + NODES[s] * h, trial, k[s]);
      }
      // The seventh stage is taken at the fifth-order solution itself (first same as last).
      next.set(trial);
      for (let i = 0; i < dimension; i++) {
        let sum = 0;
        for (let s = 0; s < 7; s++) sum += ERROR_WEIGHTS[s] * k[s][i];
        error[i] = h * sum;
      }
    },
  };
}

/**
 * Integrates dy/dt from (t0, y0) and calls `visit(index, t, y)` at each of `times` (ascending, ≥ t0).
 * A step is accepted when every component's error estimate is ≤ absolute + relative·|y|.
 * Throws RangeError when times run backwards and Error when the step shrinks to nothing.
 */
export function integrate(
  derivative: Derivative,
  t0: number,
  y0: ArrayLike<number>,
  times: ArrayLike<number>,
  visit: (index: number, t: number, y: Float64Array) => void,
  settings: IntegratorSettings = TIGHT,
): void {
  const dimension = y0.length;
  const { step } = createStepper(derivative, dimension);
  let y = Float64Array.from(y0);
  let next = new Float64Array(dimension);
  const error = new Float64Array(dimension);
  let t = t0;
  let steps = 0;
  let wanted = times.length > 0 ? (times[times.length - 1] - t0) / 1000 : 0;
  for (let index = 0; index < times.length; index++) {
    const goal = times[index];
    if (!(goal >= t)) throw new RangeError(`output times must ascend from ${t0}: time ${index} is ${goal} after ${t}`);
    while (t < goal) {
      const last = t + wanted >= goal * (1 - 1e-15) || t + wanted >= goal;
      const h = last ? goal - t : wanted;
      step(t, y, h, next, error);
      let worst = 0;
      for (let i = 0; i < dimension; i++) {
        const scale =
          settings.absoluteTolerance + settings.relativeTolerance * Math.max(Math.abs(y[i]), Math.abs(next[i]));
        const ratio = Math.abs(error[i]) / scale;
        // A value that is not finite must count as too large an error, not compare as false.
        worst = Math.max(worst, Number.isFinite(ratio) ? ratio : Infinity);
      }
      const factor = worst === 0 ? 5 : Math.min(5, Math.max(0.2, 0.9 * worst ** -0.2));
      if (worst <= 1) {
        t = last ? goal : t + h;
        [y, next] = [next, y];
        // A step cut short by an output time says nothing against the longer one that was wanted.
        wanted = last ? Math.max(wanted, h * factor) : h * factor;
      } else {
        wanted = h * factor;
      }
      // The step that is wanted counts, not the one taken: what is left to an output time may rightly be tiny.
      if (++steps > STEP_LIMIT || t + wanted === t) throw new Error(`integrator stuck at t = ${t} with step ${wanted}`);
    }
    visit(index, t, y);
  }
}
