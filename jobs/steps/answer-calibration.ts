import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { loadInstrument } from '../store/instrument-rows.ts';
import { observationOf } from './calibrate-instrument.ts';

/** What a calibration rests on: how late each standard melts at its rate. */
export interface CalibrationPoints {
  calibration: InstrumentCalibration | null;
  /** by substance as the sheet names it; K/s and K */
  standards: { sample: string; rateKPerS: number; lateK: number; errorK: number }[];
}

/** The standards of an instrument against its correction; undefined where there is no such instrument. */
export async function answerCalibration(ports: Ports, instrumentId: string): Promise<CalibrationPoints | undefined> {
  const rows = await loadInstrument(ports, instrumentId);
  if (!rows) return undefined;
  const standards = rows.standards.flatMap((scan) =>
    observationOf(scan, rows.instrument.instrument, []).map(({ melting, meltingK }) => ({
      sample: scan.sample,
      rateKPerS: melting.rateKPerS,
      lateK: melting.onsetK - meltingK,
      errorK: melting.onsetErrorK,
    })),
  );
  return { calibration: rows.instrument.calibration, standards };
}
