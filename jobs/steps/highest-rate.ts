/** Windows over the file that a ramp has to fill: short enough for a ramp between holds, long enough to average noise. */
const WINDOWS = 50;

/**
 * Highest heating rate that a file shows, K/s: the steepest of WINDOWS equal stretches of T(t), 0 where none rises.
 * Only tells a chip from a furnace; the rate of an event is measured by the reduction.
 * @param timeS s, increasing @param temperatureK K
 */
export function highestHeatingRate(timeS: Float64Array, temperatureK: Float64Array): number {
  const step = Math.max(1, Math.floor(timeS.length / WINDOWS));
  let highest = 0;
  for (let i = 0; i + step < timeS.length; i += step) {
    const rate = (temperatureK[i + step] - temperatureK[i]) / (timeS[i + step] - timeS[i]);
    if (rate > highest) highest = rate;
  }
  return highest;
}
