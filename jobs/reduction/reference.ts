import type { ReadScan } from '../../schema/wire/scan.ts';
import { interpolate } from '../numeric/local-polynomial.ts';

/** The two programmes may differ by this much at equal times: K, or part of the temperature span. */
const PROGRAMME_TOLERANCE = { K: 1.5, part: 0.01 };
/** The reference may be shorter than the scan by this part of it; its last value is held there. */
const SHORTER_BY = 0.02;

/**
 * Takes a blank or a rescan of the crystallised sample off, at equal times from the start of each file.
 * @param heatFlow of the scan, spikes bridged, in the scan's unit
 * @returns the difference, or why the reference does not fit
 */
export function subtractReference(
  scan: ReadScan,
  heatFlow: Float64Array,
  reference: ReadScan,
): { heatFlow: Float64Array } | { reason: string; action: string } {
  const action = 'Name a reference recorded with the same programme and unit in scans.csv, or leave the column empty.';
  if (scan.heatFlowUnit !== reference.heatFlowUnit) {
    return { reason: `the scan is in ${scan.heatFlowUnit}, its reference in ${reference.heatFlowUnit}`, action };
  }
  const n = scan.timeS.length;
  const shift = reference.timeS[0] - scan.timeS[0];
  const last = reference.timeS[reference.timeS.length - 1] - shift;
  const duration = scan.timeS[n - 1] - scan.timeS[0];
  if (scan.timeS[n - 1] - last > SHORTER_BY * duration) {
    const part = Math.round((100 * (last - scan.timeS[0])) / duration);
    return { reason: `the reference ends at ${part} % of the scan`, action };
  }
  let lowest = scan.temperatureK[0];
  let highest = lowest;
  let worst = 0;
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const t = scan.timeS[i];
    const T = scan.temperatureK[i];
    lowest = Math.min(lowest, T);
    highest = Math.max(highest, T);
    if (t <= last)
      worst = Math.max(worst, Math.abs(interpolate(reference.timeS, reference.temperatureK, t + shift) - T));
    out[i] = heatFlow[i] - interpolate(reference.timeS, reference.heatFlow, t + shift);
  }
  const allowed = Math.max(PROGRAMME_TOLERANCE.K, PROGRAMME_TOLERANCE.part * (highest - lowest));
  if (worst > allowed) {
    return {
      reason: `scan and reference ran different programmes: at equal times they are up to ${worst.toFixed(1)} K apart (limit ${allowed.toFixed(1)} K)`,
      action,
    };
  }
  return { heatFlow: out };
}
