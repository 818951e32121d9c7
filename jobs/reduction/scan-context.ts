import type { Flag } from '../../schema/wire/flags.ts';
import type { InstrumentCalibration, ReadScan } from '../../schema/wire/scan.ts';
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
  /** First-order delay of the signal that is undone, s: the instrument's response and the sample's own contact with it */
  responseS: number;
  /** The contact's part of it: R_th m c_p where all three are known */
  contactS: number;
  /** K to add to a measured temperature near `atK` at a rate (K/s): offset and the shift part of the lag off */
  shiftAt: (rateKPerS: number, atK: number) => number;
}

export function createContext(scan: ReadScan, y: Float64Array, input: ReduceInput, flags: Flag[]): ScanContext {
  const { calibration, massKg, file, sample, heatCapacityJPerKgK = 0 } = input;
  const ownS = Math.max(0, calibration.responseS ?? 0);
  // An event's heat leaves the sample through the contact: the signal lags behind it by R_th m c_p, which is part of the whole lag.
  const resistance = scan.heatFlowUnit === 'W/kg' ? 0 : (calibration.resistanceKPerW ?? 0);
  const contactS = Math.max(0, Math.min(resistance * (massKg ?? 0) * heatCapacityJPerKgK, calibration.lagS - ownS));
  const responseS = ownS + contactS;
  return {
    scan,
    y,
    noise: noiseSigma(y),
    input,
    ...(massKg !== undefined && { massKg }),
    where: { file, sample, instrument: calibration.instrument },
    flags,
    responseS,
    contactS,
    shiftAt: (rate, atK) => -offsetAt(calibration, atK) - (calibration.lagS - responseS) * rate,
  };
}

/** Offset at a temperature, K: linear where standards of several metals say so. */
export const offsetAt = ({ offsetK, offsetSlope, offsetAtK }: InstrumentCalibration, atK: number): number =>
  offsetK + (offsetSlope === undefined || offsetAtK === undefined ? 0 : offsetSlope * (atK - offsetAtK));
