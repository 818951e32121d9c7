import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { type Accumulated, accumulate, lnIntegral, lnIntegralAlong, type Panels, timeOfIntegral } from './programme.ts';
import type { RateCurve } from './rate-curve.ts';

/** Ends of the golden section, K. */
const FASTEST_WITHIN_K = 1e-6;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/**
 * JMAK with K(T) of the shared law: α = 1 − exp[−(∫K dt)^n], so ln ∫K dt = ln X/n, and t = [−ln(1 − α)]^(1/n)/K(T) at a constant
 * temperature.
 */
export class SharedKinetics implements Kinetics {
  readonly mostConversion = 1 - 1e-12;
  readonly lnRate: Kinetics['lnRate'];
  readonly steepness: Kinetics['steepness'];
  readonly breaksK: readonly number[];
  private readonly exponent: number;
  private fastest: number | undefined;

  /** @param findFastestK temperature of the largest K, where the driving force makes one; looked for when it is asked for */
  constructor(
    curve: RateCurve,
    private readonly findFastestK?: (lnRate: Kinetics['lnRate']) => number,
  ) {
    this.lnRate = curve.lnRate;
    this.steepness = curve.steepness;
    this.breaksK = curve.breaksK;
    this.exponent = curve.exponent;
  }

  get fastestK(): number {
    this.fastest ??= this.findFastestK?.(this.lnRate) ?? TEMPERATURE_RANGE.highest;
    return this.fastest;
  }

  lnTime(conversion: number, T: number): number {
    return extentOf(conversion) / this.exponent - this.lnRate(T);
  }

  extent(T: number, timeS: number): number {
    return this.exponent * (this.lnRate(T) + Math.log(timeS));
  }

  timeOn(panels: Panels, conversion: number, done = accumulate(panels, this.lnRate)): number {
    return timeOfIntegral(panels, done, this.lnRate, extentOf(conversion) / this.exponent);
  }

  extentOn(panels: Panels, done?: Accumulated): number {
    return this.exponent * (done ? lnIntegral(done) : lnIntegralAlong(panels, this.lnRate));
  }
}

/** Temperature of the largest K between two temperatures, to 1e-6 K (golden section; ln K rises, then falls to melting). */
export function findFastest(lnRate: (temperatureK: number) => number, fromK: number, meltingK: number): number {
  let [a, b] = [fromK, meltingK];
  let [c, d] = [b - GOLDEN * (b - a), a + GOLDEN * (b - a)];
  let [atC, atD] = [lnRate(c), lnRate(d)];
  // One of the two inner points of a golden section is one of the next: a step asks once.
  while (b - a > FASTEST_WITHIN_K) {
    if (atC > atD) {
      [b, d, atD] = [d, c, atC];
      c = b - GOLDEN * (b - a);
      atC = lnRate(c);
    } else {
      [a, c, atC] = [c, d, atD];
      d = a + GOLDEN * (b - a);
      atD = lnRate(d);
    }
  }
  return (a + b) / 2;
}
