import { LeastSquares } from '../numeric/least-squares.ts';
import { fitLine } from '../numeric/line.ts';

/** log10 of the viscosity (Pa s) at which Tg is put: common practice, no source. */
export const LOG10_AT_GLASS_TRANSITION = 12;
/** log10 η∞ of silicate and other liquids, Pa s: Zheng, Mauro, Ellison, Potuzak & Yue 2011, Phys. Rev. B 83:212202 (value from memory). */
export const LOG10_INFINITY = -2.93;

/** One law of the equilibrium liquid's viscosity; log10 η in Pa s. */
export interface ViscosityLaw {
  kind: 'vft' | 'myega';
  /** log10 η∞ */
  log10Infinity: number;
  /** where log10 η = 12, K */
  glassTransitionK: number;
  /** d log10 η/d(Tg/T) at Tg */
  fragility: number;
}

/**
 * VFT: log10 η = log10 η∞ + B/(T − T0), in terms of Tg and m: with D = 12 − log10 η∞, T0 = Tg (1 − D/m), B = D (Tg − T0).
 * MYEGA (Mauro, Yue, Ellison, Gupta & Allan 2009, PNAS 106:19780, eq. 6):
 * log10 η = log10 η∞ + D (Tg/T) exp[(m/D − 1)(Tg/T − 1)].
 */
export function log10Viscosity(law: ViscosityLaw, temperatureK: number): number {
  const span = LOG10_AT_GLASS_TRANSITION - law.log10Infinity;
  if (law.kind === 'vft') {
    const zero = law.glassTransitionK * (1 - span / law.fragility);
    return law.log10Infinity + (span * (law.glassTransitionK - zero)) / (temperatureK - zero);
  }
  const ratio = law.glassTransitionK / temperatureK;
  return law.log10Infinity + span * ratio * Math.exp((law.fragility / span - 1) * (ratio - 1));
}

/** VFT coefficients (log10 form, K) as Tg and m. */
export function vftFromCoefficients(log10Infinity: number, bK: number, zeroK: number): ViscosityLaw {
  const span = LOG10_AT_GLASS_TRANSITION - log10Infinity;
  const glassTransitionK = zeroK + bK / span;
  return {
    kind: 'vft',
    log10Infinity,
    glassTransitionK,
    fragility: (bK * glassTransitionK) / (glassTransitionK - zeroK) ** 2,
  };
}

export interface ViscosityFit {
  law: ViscosityLaw;
  /** standard errors; undefined with as many rows as parameters */
  fragilityError?: number;
  glassTransitionErrorK?: number;
  /** 3 × 3, of (log10 η∞, Tg, m); undefined as above */
  covariance?: Float64Array;
  /** root mean square residual, decades */
  scatter: number;
  rows: number;
  converged: boolean;
  message: string;
}

/** Fewest rows for three parameters and an error. */
export const LEAST_VISCOSITIES = 4;

/**
 * Least squares of a viscosity law on a table; parameters log10 η∞, Tg, m.
 * @param table at least four rows over at least two decades
 * @returns undefined where the table cannot carry three parameters
 */
export function fitViscosity(
  kind: ViscosityLaw['kind'],
  table: readonly { temperatureK: number; log10PaS: number }[],
): ViscosityFit | undefined {
  const n = table.length;
  const values = table.map((r) => r.log10PaS);
  if (n < LEAST_VISCOSITIES || Math.max(...values) - Math.min(...values) < 2) return undefined;
  const lawOf = (p: ArrayLike<number>): ViscosityLaw => ({
    kind,
    log10Infinity: p[0],
    glassTransitionK: p[1],
    fragility: p[2],
  });
  const steps = [1e-4, 1e-3, 1e-3];
  const solver = new LeastSquares(n, 3, (p, r, J) => {
    const span = LOG10_AT_GLASS_TRANSITION - p[0];
    if (!(span > 3) || !(p[1] > 0) || !(p[2] > 0) || (kind === 'vft' && !(p[2] >= span))) {
      r.fill(Number.POSITIVE_INFINITY);
      return;
    }
    for (let i = 0; i < n; i++) {
      const T = table[i].temperatureK;
      r[i] = log10Viscosity(lawOf(p), T) - table[i].log10PaS;
      for (let k = 0; k < 3; k++) {
        const [up, down] = [1, -1].map((side) => {
          const q = Float64Array.from(p);
          q[k] += side * steps[k];
          return log10Viscosity(lawOf(q), T);
        });
        J[i * 3 + k] = (up - down) / (2 * steps[k]);
      }
    }
  });
  let best: ReturnType<typeof solver.solve> | undefined;
  const start = startTransition(table);
  for (const fragility of [20, 40, 70, 110]) {
    const fit = solver.solve(Float64Array.of(LOG10_INFINITY, start, fragility), Float64Array.of(1, 10, 10), 200, 1e-7);
    if (Number.isFinite(fit.sumOfSquares) && (!best || fit.sumOfSquares < best.sumOfSquares)) best = fit;
  }
  if (!best) return undefined;
  const error = (k: number) => (n > 3 && best?.covariance ? Math.sqrt(best.covariance[k * 4]) : undefined);
  return {
    law: lawOf(best.parameters),
    fragilityError: error(2),
    glassTransitionErrorK: error(1),
    covariance: n > 3 ? best.covariance : undefined,
    scatter: Math.sqrt(best.sumOfSquares / Math.max(1, n - 3)),
    rows: n,
    converged: best.converged,
    message: best.message,
  };
}

/** Where the straight line through the rows nearest to 10^12 Pa s reaches it, K. */
function startTransition(table: readonly { temperatureK: number; log10PaS: number }[]): number {
  const near = [...table].sort(
    (a, b) => Math.abs(a.log10PaS - LOG10_AT_GLASS_TRANSITION) - Math.abs(b.log10PaS - LOG10_AT_GLASS_TRANSITION),
  );
  const rows = near.slice(0, Math.max(3, Math.ceil(near.length / 3)));
  const line = fitLine(
    rows.map((r) => r.log10PaS),
    rows.map((r) => 1 / r.temperatureK),
  );
  const x = line.intercept + line.slope * LOG10_AT_GLASS_TRANSITION;
  const limits = [Math.min(...table.map((r) => r.temperatureK)) * 0.7, Math.max(...table.map((r) => r.temperatureK))];
  return Math.min(limits[1], Math.max(limits[0], 1 / x));
}
