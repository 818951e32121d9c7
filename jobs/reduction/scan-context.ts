import type { Flag } from '../../schema/wire/flags.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import { noiseSigma } from './find-event.ts';

/** What every part of a reduction needs to know of its scan. */
export interface ScanContext {
  scan: ReadScan;
  /** heat flow, exotherm up, spikes bridged, reference subtracted; W or W/kg */
  y: Float64Array;
  /** of one row, one standard deviation, unit of y */
  noise: number;
  input: ReduceInput;
  massKg?: number;
  where: { file: string; sample: string; instrument: string };
  /** findings are added here */
  flags: Flag[];
  /** K to add to a measured temperature at a rate (K/s): offset and the shift part of the lag off */
  shiftAt: (rateKPerS: number) => number;
}

export function createContext(scan: ReadScan, y: Float64Array, input: ReduceInput, flags: Flag[]): ScanContext {
  const { calibration, massKg, file, sample } = input;
  return {
    scan,
    y,
    noise: noiseSigma(y),
    input,
    ...(massKg !== undefined && { massKg }),
    where: { file, sample, instrument: calibration.instrument },
    flags,
    shiftAt: (rate) => -calibration.offsetK - (calibration.lagS - Math.max(0, calibration.responseS ?? 0)) * rate,
  };
}
