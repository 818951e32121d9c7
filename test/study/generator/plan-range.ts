import { R, type TemperatureLaw } from './temperature-laws.ts';

/**
 * Temperature at which a JMAK event has roughly reached a conversion at a constant rate, K, from X ≈ K R T²/(E β):
 * good to a few K, for choosing a programme's limits only.
 */
export function roughTemperature(law: TemperatureLaw, exponent: number, rateKPerS: number, conversion: number): number {
  const wanted = Math.log(-Math.log1p(-conversion)) / exponent;
  let [low, high] = [60, 4000];
  for (let i = 0; i < 80; i++) {
    const middle = (low + high) / 2;
    const reached = law.lnK(middle) + Math.log((R * middle ** 2) / (law.localEnergy(middle) * rateKPerS));
    if (reached < wanted) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/** Start and end of one programme that holds an event at all of `ratesKPerS` with `margin` widths of flat signal about it, K. */
export function programmeLimits(
  law: TemperatureLaw,
  exponent: number,
  ratesKPerS: readonly number[],
  margin = 3,
): { startK: number; endK: number } {
  const slow = Math.min(...ratesKPerS);
  const fast = Math.max(...ratesKPerS);
  const width = (rate: number): number => {
    const peak = roughTemperature(law, exponent, rate, 0.63);
    // FWHM of a JMAK event, 2.446 R T²/(n E): exact in the limit of large E/(R T)
    return (2.446 * R * peak ** 2) / (exponent * law.localEnergy(peak));
  };
  const startK = roughTemperature(law, exponent, slow, 1e-3) - margin * width(slow);
  return {
    startK: Math.max(startK, 0.4 * roughTemperature(law, exponent, slow, 0.63)),
    endK: roughTemperature(law, exponent, fast, 1 - 1e-4) + margin * width(fast),
  };
}
