import type { InstrumentCalibration, ReadScan } from './scan.ts';
import type { ExothermDirection, Role } from './states.ts';

/** What `reduce-scan` needs beside the columns. */
export interface ReduceInput {
  file: string;
  sample: string;
  role: Role;
  rateNominalKPerS?: number;
  massKg?: number;
  exotherm?: ExothermDirection;
  /** 1-based over all segments; empty = the first heating segment that shows an event */
  segment?: number;
  /** Where the baseline is tied, K on the corrected scale, lower and upper: stands in the place of the automatic limits */
  limitsK?: [number, number];
  calibration: InstrumentCalibration;
  meltingK?: number;
  crystallizationEnthalpyJPerKg?: number;
  heatCapacityJPerKgK?: number;
  /** Blank or rescan of the crystallised sample on the same programme: subtracted row by row */
  reference?: ReadScan;
}
