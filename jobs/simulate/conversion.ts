import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { lnRateConstant, localEnergy, type RateLaw } from './rate-law.ts';

/** Gauss–Legendre nodes and weights on [−1, 1], four points (Abramowitz & Stegun, table 25.4). */
const NODES = [-0.861136311594053, -0.339981043584856, 0.339981043584856, 0.861136311594053];
const WEIGHTS = [0.347854845137454, 0.652145154862546, 0.652145154862546, 0.347854845137454];

/** Largest change of ln K over one quadrature step; four points then integrate exp to better than 1e-10 of the step. */
const LARGEST_STEP = 0.5;

export interface SimulatedConversion {
  /** α, 0 … 1 */
  conversion: Float64Array;
  /** dα/dt, 1/s */
  ratePerS: Float64Array;
}

/**
 * Johnson–Mehl–Avrami–Kolmogorov conversion along a sample temperature T(t):
 * α = 1 − exp(−X^n), X = ∫K(T(t)) dt from the first time on, dα/dt = n K X^(n−1) exp(−X^n).
 * For n < 1 the law's rate has no bound at X = 0; it is given as 0 there.
 *
 * @param timeS ascending times, s, shape (rows)
 * @param sampleK temperature of the sample at any time, K
 */
export function simulateConversion(
  law: RateLaw,
  avramiExponent: number,
  timeS: Float64Array,
  sampleK: (timeS: number) => number,
): SimulatedConversion {
  const n = avramiExponent;
  if (!(n > 0)) throw new RangeError(`the Avrami exponent must be above 0; got ${n}`);
  const conversion = new Float64Array(timeS.length);
  const ratePerS = new Float64Array(timeS.length);
  let extended = 0;
  for (let i = 0; i < timeS.length; i++) {
    if (i > 0) extended += integrateRate(law, timeS[i - 1], timeS[i], sampleK);
    const power = extended ** n;
    conversion[i] = -Math.expm1(-power);
    if (extended > 0) {
      ratePerS[i] = n * Math.exp(lnRateConstant(law, sampleK(timeS[i])) + (n - 1) * Math.log(extended) - power);
    } else if (n === 1) {
      ratePerS[i] = Math.exp(lnRateConstant(law, sampleK(timeS[i])));
    }
  }
  return { conversion, ratePerS };
}

/** ∫K dt between two times, subdivided so that ln K changes by at most LARGEST_STEP a piece. */
function integrateRate(law: RateLaw, fromS: number, toS: number, sampleK: (timeS: number) => number): number {
  const fromK = sampleK(fromS);
  const toK = sampleK(toS);
  const steepest =
    Math.max(localEnergy(law, fromK), localEnergy(law, toK)) / (GAS_CONSTANT * Math.min(fromK, toK) ** 2);
  const pieces = Math.max(1, Math.ceil((steepest * Math.abs(toK - fromK)) / LARGEST_STEP));
  const half = (toS - fromS) / pieces / 2;
  let sum = 0;
  for (let piece = 0; piece < pieces; piece++) {
    const centre = fromS + half * (2 * piece + 1);
    for (let k = 0; k < NODES.length; k++) {
      sum += WEIGHTS[k] * Math.exp(lnRateConstant(law, sampleK(centre + half * NODES[k])));
    }
  }
  return sum * half;
}
