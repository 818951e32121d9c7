import { noiseSigma } from './find-event.ts';

/** A spike stands this many noise sigmas off the line between its neighbours … */
const LEAST_SIGMAS = 12;
/** … this many times the largest step between the rows around it … */
const STEPS = 6;
/** … and this part of the signal's range. */
const RANGE_PART = 0.005;

/**
 * Single-row spikes replaced by the mean of their neighbours.
 * @returns the signal (a copy where anything was bridged) and the rows
 */
export function bridgeSpikes(y: Float64Array): { y: Float64Array; rows: number[] } {
  const n = y.length;
  const rows: number[] = [];
  if (n < 7) return { y, rows };
  const sigma = noiseSigma(y);
  let low = y[0];
  let high = y[0];
  for (let i = 1; i < n; i++) {
    if (y[i] < low) low = y[i];
    else if (y[i] > high) high = y[i];
  }
  const least = Math.max(LEAST_SIGMAS * sigma, RANGE_PART * (high - low));
  for (let i = 2; i < n - 2; i++) {
    const off = Math.abs(y[i] - (y[i - 1] + y[i + 1]) / 2);
    if (off <= least) continue;
    const around = Math.max(
      Math.abs(y[i + 1] - y[i - 1]),
      Math.abs(y[i - 1] - y[i - 2]),
      Math.abs(y[i + 2] - y[i + 1]),
    );
    if (off > STEPS * around) rows.push(i);
  }
  if (rows.length === 0) return { y, rows };
  const out = Float64Array.from(y);
  for (const i of rows) out[i] = (y[i - 1] + y[i + 1]) / 2;
  return { y: out, rows };
}
