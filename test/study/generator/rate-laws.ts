/**
 * Rate laws dα/dt = K(T) f(α), each with the variable in which it is integrated.
 *
 * JMAK is not integrated in α: f(0) = 0 for n > 1, so α = 0 stays a solution for ever, and a seed would be a number
 * nobody measured. X = ∫K dt has no such root, X' = K(T(t)), and α = 1 − exp(−Xⁿ) is exact.
 */
export interface RateLaw {
  /** State at the start of the programme. */
  start: number;
  /** d state/dt divided by K */
  drive(state: number): number;
  conversion(state: number): number;
  /** f(α) at this state: dα/dt divided by K */
  rateFactor(state: number): number;
  /** d ln f / d state × drive: with the temperature's part it is zero at the peak of dα/dt. */
  logRateSlope(state: number): number;
}

export function jmakLaw(exponent: number): RateLaw {
  const n = exponent;
  return {
    start: 0,
    drive: () => 1,
    conversion: (x) => -Math.expm1(-(x ** n)),
    rateFactor: (x) => (x === 0 ? (n === 1 ? 1 : 0) : n * x ** (n - 1) * Math.exp(-(x ** n))),
    logRateSlope: (x) => (n - 1) / x - n * x ** (n - 1),
  };
}

/** Conversion at which the Šesták–Berggren law is started: f(0) = 0 for M > 0; 1e-9 is far under any grid value. */
const SEED = 1e-9;

/**
 * f = α^M (1 − α)^N (Šesták & Berggren 1971), integrated in u = −ln(1 − α), which stays smooth as α → 1.
 * N ≥ 1 and 0 ≤ M < 1: below N = 1 the law ends at a finite time, above M = 1 the seed decides when it starts.
 */
export function sestakBerggrenLaw(exponentM: number, exponentN: number): RateLaw {
  if (!(exponentM >= 0 && exponentM < 1)) throw new RangeError(`exponent M must be in [0, 1): ${exponentM}`);
  if (!(exponentN >= 1)) throw new RangeError(`exponent N must be at least 1: ${exponentN}`);
  const drive = (u: number): number => (-Math.expm1(-u)) ** exponentM * Math.exp(-(exponentN - 1) * u);
  return {
    start: exponentM === 0 ? 0 : -Math.log1p(-SEED),
    drive,
    conversion: (u) => -Math.expm1(-u),
    rateFactor: (u) => (-Math.expm1(-u)) ** exponentM * Math.exp(-exponentN * u),
    logRateSlope: (u) => ((exponentM === 0 ? 0 : exponentM / Math.expm1(u)) - exponentN) * drive(u),
  };
}
