import { R, type TemperatureLaw } from './temperature-laws.ts';

/**
 * Temperature at which the extended variable X = ∫K dt has roughly reached a value at a constant rate, K, from
 * X ≈ K R T²/(E β): good to a few K, for choosing a programme's limits only. A JMAK event peaks near X = 1 and has
 * reached conversion α at X = [−ln(1 − α)]^(1/n).
 */
export function roughTemperature(law: TemperatureLaw, rateKPerS: number, extended: number): number {
  const wanted = Math.log(extended);
  let [low, high] = [60, 4000];
  for (let i = 0; i < 80; i++) {
    const middle = (low + high) / 2;
    const reached = law.lnK(middle) + Math.log((R * middle ** 2) / (law.localEnergy(middle) * rateKPerS));
    if (reached < wanted) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/** Share of X that may be missing because the programme starts late: a JMAK peak with n = 4 feels 3 % of it as 0.6 % of Kissinger's E. */
const LATE_START = 1e-3;
/** Conversions between which the event counts as such; flat signal is kept beside them. */
const [BEGUN, DONE] = [1e-3, 1 - 1e-4];

/** Start and end of one programme that holds an event at all of `ratesKPerS` with `margin` widths of flat signal about it, K. */
export function programmeLimits(
  law: TemperatureLaw,
  exponent: number,
  ratesKPerS: readonly number[],
  margin = 3,
): { startK: number; endK: number } {
  const slow = Math.min(...ratesKPerS);
  const fast = Math.max(...ratesKPerS);
  const at = (rate: number, conversion: number): number =>
    roughTemperature(law, rate, (-Math.log1p(-conversion)) ** (1 / exponent));
  const width = (rate: number): number => {
    const peak = roughTemperature(law, rate, 1);
    // FWHM of a JMAK event, 2.446 R T²/(n E): exact in the limit of large E/(R T)
    return (2.446 * R * peak ** 2) / (exponent * law.localEnergy(peak));
  };
  return {
    startK: Math.max(60, Math.min(roughTemperature(law, slow, LATE_START), at(slow, BEGUN) - margin * width(slow))),
    endK: at(fast, DONE) + margin * width(fast),
  };
}
