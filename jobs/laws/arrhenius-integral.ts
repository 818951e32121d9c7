import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { temperatureIntegralFactorFast } from './temperature-integral.ts';

/**
 * J(E) = ∫ exp(−(E/R)(1/T(t) − x0)) dt along a programme that is linear between its rows, with its first two derivatives by E.
 * The scale x0 (1/K) keeps everything near 1. On a stretch where T rises linearly,
 *   J   = Δt/ΔT [T h(x)/x · e^(x0 E/R − x)],  x = E/(R T),  h the temperature integral's factor,
 *   J'  = −(1/R) Δt/ΔT [e^(…)(1/x − h/x²)]    (E1 in place of p), and
 *   J'' = Δt/(R E ΔT) [e^(…)],
 * differences between the ends of the stretch; the scale itself is not differentiated. Below x = 10, and so for every E ≤ 0 (the
 * effective energy of crystallisation on cooling), the closed form loses digits or does not exist: there Gauss–Legendre panels are summed.
 */
export interface ArrheniusIntegral {
  value: number;
  byEnergy: number;
  byEnergy2: number;
}

/** Below this E ΔT/(R T²) the difference of the closed form loses digits and the middle of the stretch is as good (error z²/24). */
const SHORT_STRETCH = 2e-3;
/** Below this x the rational factor is off by more than 1e-6. */
const LEAST_X = 10;
/** Panels of the quadrature are at most this long in x and in ln T; five nodes then leave less than 1e-9. */
const PANEL = 0.5;
const PANEL_LN_T = 0.2;
const NODES = [0, 0.5384693101056831, -0.5384693101056831, 0.906179845938664, -0.906179845938664];
const NODE_WEIGHTS = [
  0.5688888888888889, 0.47862867049936647, 0.47862867049936647, 0.23692688505618908, 0.23692688505618908,
];

/** Sums over rows from … to (inclusive) of a programme; adds to `out`. */
export function addArrheniusIntegral(
  timeS: Float64Array,
  temperatureK: Float64Array,
  from: number,
  to: number,
  energyJPerMol: number,
  x0: number,
  out: ArrheniusIntegral,
): void {
  const c = energyJPerMol / GAS_CONSTANT;
  const shift = c * x0;
  // What the end of a stretch costs serves the start of the next: its row, exponential and factor.
  let knownRow = -1;
  let e1 = 0;
  let h1 = 0;
  for (let i = from; i < to; i++) {
    const T1 = temperatureK[i];
    const T2 = temperatureK[i + 1];
    const x1 = c / T1;
    const x2 = c / T2;
    if (!(x1 > LEAST_X && x2 > LEAST_X && Math.abs(x1 - x2) >= SHORT_STRETCH)) {
      addStretch(T1, T2, timeS[i + 1] - timeS[i], c, shift, out);
      continue;
    }
    if (knownRow !== i) {
      e1 = Math.exp(shift - x1);
      h1 = temperatureIntegralFactorFast(x1) / x1;
    }
    const e2 = Math.exp(shift - x2);
    const h2 = temperatureIntegralFactorFast(x2) / x2;
    addClosedForm(T1, T2, timeS[i + 1] - timeS[i], c, e1, h1, e2, h2, out);
    knownRow = i + 1;
    e1 = e2;
    h1 = h2;
  }
}

/** One linear stretch of `dt` s from T1 to T2. @param c E/R, K   @param shift x0 E/R */
export function addStretch(T1: number, T2: number, dt: number, c: number, shift: number, out: ArrheniusIntegral): void {
  const x1 = c / T1;
  const x2 = c / T2;
  if (!(x1 > LEAST_X && x2 > LEAST_X)) {
    addByQuadrature(T1, T2, dt, c, shift, out);
    return;
  }
  if (Math.abs(x1 - x2) < SHORT_STRETCH) {
    const T = (T1 + T2) / 2;
    const k = dt * Math.exp(shift - c / T);
    out.value += k;
    out.byEnergy -= k / (GAS_CONSTANT * T);
    out.byEnergy2 += k / (GAS_CONSTANT * T) ** 2;
    return;
  }
  const e1 = Math.exp(shift - x1);
  const e2 = Math.exp(shift - x2);
  const h1 = temperatureIntegralFactorFast(x1) / x1;
  const h2 = temperatureIntegralFactorFast(x2) / x2;
  addClosedForm(T1, T2, dt, c, e1, h1, e2, h2, out);
}

/** With e = exp(shift − x) and h(x)/x at both ends. */
function addClosedForm(
  T1: number,
  T2: number,
  dt: number,
  c: number,
  e1: number,
  h1: number,
  e2: number,
  h2: number,
  out: ArrheniusIntegral,
): void {
  const perKelvin = dt / (T2 - T1);
  out.value += perKelvin * (T2 * h2 * e2 - T1 * h1 * e1);
  out.byEnergy -= (perKelvin / (GAS_CONSTANT * c)) * (T2 * e2 * (1 - h2) - T1 * e1 * (1 - h1));
  out.byEnergy2 += (perKelvin / (GAS_CONSTANT * GAS_CONSTANT * c)) * (e2 - e1);
}

/** Below this part of the whole, ln, what lies before a ramp's start does not change the last digit. */
const LN_NEGLIGIBLE = -37;
/** Below this part ln(1 − part) is its first two terms. */
const SMALL_PART = 1e-5;
const onRamp: ArrheniusIntegral = { value: 0, byEnergy: 0, byEnergy2: 0 };

/** ln J and its first two derivatives by E, scale included, in columns. */
export interface LnIntegrals {
  value: Float64Array;
  byEnergy: Float64Array;
  byEnergy2: Float64Array;
}

/**
 * ln J of a ramp of `rate` K/s from startK up to each of `count` temperatures, T[at] and on, into the places from `to` on of `out`. The
 * closed form of `addStretch` in logarithms: with c = E/R and H = h/x, ln[T H/β] + x0 c − x, then x0 + s/c with s = 1 − 1/H, then (x/H − s²)/c².
 */
export function fillRampIntegrals(
  startK: number,
  T: Float64Array,
  at: number,
  count: number,
  rate: number,
  energyJPerMol: number,
  x0: number,
  out: LnIntegrals,
  to: number,
): void {
  const { value, byEnergy, byEnergy2 } = out;
  const c = energyJPerMol / GAS_CONSTANT;
  const shift = c * x0;
  const xs = c / startK;
  const hs = temperatureIntegralFactorFast(xs) / xs;
  const lnStart = Math.log(startK * hs) - xs;
  const slopeStart = 1 - 1 / hs;
  const bendStart = xs / hs - slopeStart * slopeStart;
  const common = shift - Math.log(rate);
  for (let k = 0; k < count; k++) {
    const x = c / T[at + k];
    if (!(x > LEAST_X) || Math.abs(xs - x) < SHORT_STRETCH) {
      onRamp.value = 0;
      onRamp.byEnergy = 0;
      onRamp.byEnergy2 = 0;
      addStretch(startK, T[at + k], (T[at + k] - startK) / rate, c, shift, onRamp);
      setLnIntegral(onRamp, x0, out, to + k);
      continue;
    }
    const h = temperatureIntegralFactorFast(x) / x;
    let ln = Math.log(T[at + k] * h) - x;
    let slope = 1 - 1 / h;
    let bend = x / h - slope * slope;
    const before = lnStart - ln;
    if (before > LN_NEGLIGIBLE) {
      const part = Math.exp(before);
      const left = 1 - part;
      const apart = slopeStart - slope;
      bend = (bend - part * bendStart) / left - (part * apart * apart) / (left * left);
      slope -= (part * apart) / left;
      ln += part < SMALL_PART ? -part * (1 + part / 2) : Math.log1p(-part);
    }
    value[to + k] = ln + common;
    byEnergy[to + k] = (slope / c + x0) / GAS_CONSTANT;
    byEnergy2[to + k] = bend / (energyJPerMol * energyJPerMol);
  }
}

/** The logarithm of an integral and its derivatives, scale included, at one place of `out`. */
export function setLnIntegral(integral: ArrheniusIntegral, x0: number, out: LnIntegrals, at: number): void {
  const slope = integral.byEnergy / integral.value;
  out.value[at] = Math.log(integral.value);
  out.byEnergy[at] = slope + x0 / GAS_CONSTANT;
  out.byEnergy2[at] = integral.byEnergy2 / integral.value - slope * slope;
}

/** Five-point Gauss–Legendre over panels of the stretch: any sign of c, all terms of one sign, so nothing cancels. */
function addByQuadrature(T1: number, T2: number, dt: number, c: number, shift: number, out: ArrheniusIntegral): void {
  const panels = Math.max(
    1,
    Math.ceil(Math.abs(c / T1 - c / T2) / PANEL),
    Math.ceil(Math.abs(Math.log(T2 / T1)) / PANEL_LN_T),
  );
  const half = (T2 - T1) / panels / 2;
  const perNode = dt / panels / 2;
  for (let p = 0; p < panels; p++) {
    const middle = T1 + (2 * p + 1) * half;
    for (let q = 0; q < NODES.length; q++) {
      const T = middle + half * NODES[q];
      const k = perNode * NODE_WEIGHTS[q] * Math.exp(shift - c / T);
      out.value += k;
      out.byEnergy -= k / (GAS_CONSTANT * T);
      out.byEnergy2 += k / (GAS_CONSTANT * T) ** 2;
    }
  }
}
