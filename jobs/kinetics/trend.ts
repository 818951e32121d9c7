import { type BentScale, bendTerm, bentScale } from '../laws/bend.ts';
import { LeastSquares } from '../numeric/least-squares.ts';
import { fitLine } from '../numeric/line.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';

/** How a temperature (or a log rate) of the scans goes with heating rate, and what each scan leaves over. */
export interface Trend {
  fitted: Float64Array;
  residuals: Float64Array;
  /** leverage h_i of each scan, 0 … 1 */
  leverage: Float64Array;
}

/**
 * T_fit(β) at one conversion or of the peak. Straight: Kissinger's line. Bent: ln β = ln K(T) + ln(R T²/E_loc(T)) with the bent law, so that a bend of the material is not counted as scatter. Residuals are measured − fitted, K, at the scan's own β.
 * @param rate K/s   @param temperature K   @param weights ∝ 1/variance of T
 */
export function fitTemperatureTrend(
  rate: Float64Array,
  temperature: Float64Array,
  weights: Float64Array,
  bent: boolean,
): Trend {
  const n = rate.length;
  const x = temperature.map((T) => 1 / T);
  const y = rate.map((b, i) => Math.log(b) + 2 * Math.log(x[i]));
  const scale = bentScale(x);
  const line = fitLine(
    x.map((v) => (v - scale.x0) / scale.dx),
    y,
    weights,
  );
  // Parameters: constant, ln(E0 Δx/R), q. The line has slope −E0 Δx/R in u.
  let parameters: Float64Array = Float64Array.of(line.intercept, Math.log(Math.max(1e-6, -line.slope)), 0);
  const p = bent ? 3 : 2;
  if (bent) {
    const root = weights.map(Math.sqrt);
    const solver = new LeastSquares(n, 3, (q, r, J) => {
      for (let i = 0; i < n; i++) {
        const u = (x[i] - scale.x0) / scale.dx;
        const m = trendValue(q, u);
        r[i] = root[i] * (m.value - y[i]);
        J[i * 3] = root[i];
        J[i * 3 + 1] = root[i] * m.byLogEnergy;
        J[i * 3 + 2] = root[i] * m.byQ;
      }
    });
    const fit = solver.solve(parameters, Float64Array.of(1, 1, 1), 40, 1e-8);
    if (fit.parameters.every(Number.isFinite) && Math.abs(fit.parameters[2]) < 5) parameters = fit.parameters;
  }
  const fitted = rate.map((b, i) => solveTemperature(parameters, b, temperature[i], scale));
  const jacobian = new Float64Array(n * p);
  for (let i = 0; i < n; i++) {
    const m = trendValue(parameters, (1 / fitted[i] - scale.x0) / scale.dx);
    jacobian[i * p] = 1;
    jacobian[i * p + 1] = m.byLogEnergy;
    if (bent) jacobian[i * p + 2] = m.byQ;
  }
  return { fitted, residuals: temperature.map((T, i) => T - fitted[i]), leverage: leverages(jacobian, weights, n, p) };
}

/** ln β − 2 ln T as the law has it at reduced inverse temperature u, with derivatives. */
function trendValue(p: ArrayLike<number>, u: number): { value: number; byLogEnergy: number; byQ: number; byU: number } {
  const steep = Math.exp(p[1]);
  const t = bendTerm(p[2], u);
  return {
    value: p[0] - steep * t.value - p[2] * u,
    byLogEnergy: -steep * t.value,
    byQ: -steep * t.byQ - u,
    byU: -steep * Math.exp(p[2] * u) - p[2],
  };
}

function solveTemperature(p: Float64Array, rate: number, start: number, scale: BentScale): number {
  const lnRate = Math.log(rate);
  let x = 1 / start;
  for (let i = 0; i < 20; i++) {
    const m = trendValue(p, (x - scale.x0) / scale.dx);
    const f = m.value - lnRate - 2 * Math.log(x);
    const step = f / (m.byU / scale.dx - 2 / x);
    x = Math.min(1.5 / start, Math.max(0.67 / start, x - step));
    if (Math.abs(step) < 1e-13 * x) break;
  }
  return 1 / x;
}

/**
 * ln(dα/dt) at one conversion against β. For one rate law ln(dα/dt) − ln β + 2 ln T is constant (straight) or varies as slowly as
 * ln E_loc (bent); a line, or a parabola, in ln β takes that up.
 */
export function fitRateTrend(
  rate: Float64Array,
  fittedTemperature: Float64Array,
  lnRate: Float64Array,
  weights: Float64Array,
  bent: boolean,
): Trend {
  const n = rate.length;
  const z = rate.map((b) => Math.log(b));
  const p = bent ? 3 : 2;
  const offset = z.map((v, i) => v - 2 * Math.log(fittedTemperature[i]));
  const middle = z.reduce((s, v) => s + v, 0) / n;
  const design = new Float64Array(n * p);
  const normal = new Float64Array(p * p);
  const rhs = new Float64Array(p);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < p; k++) design[i * p + k] = (z[i] - middle) ** k;
    for (let k = 0; k < p; k++) {
      rhs[k] += weights[i] * design[i * p + k] * (lnRate[i] - offset[i]);
      for (let j = 0; j < p; j++) normal[k * p + j] += weights[i] * design[i * p + k] * design[i * p + j];
    }
  }
  if (!solveSymmetric(normal, rhs, p)) throw new RangeError(`a rate trend of ${p} terms needs ${p} distinct rates`);
  const fitted = offset.map((o, i) => {
    let v = o;
    for (let k = 0; k < p; k++) v += rhs[k] * design[i * p + k];
    return v;
  });
  return { fitted, residuals: lnRate.map((v, i) => v - fitted[i]), leverage: leverages(design, weights, n, p) };
}

/** A width or another positive length against β: a line in the logarithms. */
export function fitLogTrend(rate: Float64Array, values: Float64Array, weights: Float64Array): Trend {
  const z = rate.map((b) => Math.log(b));
  const y = values.map((v) => Math.log(v));
  const line = fitLine(z, y, weights);
  const design = new Float64Array(2 * z.length);
  z.forEach((v, i) => {
    design[2 * i] = 1;
    design[2 * i + 1] = v;
  });
  return {
    fitted: z.map((v) => line.intercept + line.slope * v),
    residuals: line.residuals,
    leverage: leverages(design, weights, z.length, 2),
  };
}

function leverages(design: Float64Array, weights: Float64Array, n: number, p: number): Float64Array {
  const normal = new Float64Array(p * p);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < p; k++) {
      for (let j = 0; j < p; j++) normal[k * p + j] += weights[i] * design[i * p + k] * design[i * p + j];
    }
  }
  const out = new Float64Array(n);
  if (!solveSymmetric(normal, new Float64Array(p), p)) return out;
  for (let i = 0; i < n; i++) {
    let h = 0;
    for (let k = 0; k < p; k++)
      for (let j = 0; j < p; j++) h += design[i * p + k] * normal[k * p + j] * design[i * p + j];
    out[i] = Math.min(0.99, weights[i] * h);
  }
  return out;
}
