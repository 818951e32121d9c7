import { reduceScan } from '../../jobs/reduction/index.ts';
import type { ReduceOutcome } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import {
  type Random,
  type RecordingSettings,
  recordScan,
  type ScanModel,
  samplingTimes,
  solveScan,
} from './generator/index.ts';

export interface RecordedAs {
  rows: number;
  recording: RecordingSettings;
  uneven?: Parameters<typeof samplingTimes>[3];
  kind?: InstrumentCalibration['kind'];
  /** What the fractions of the recording refer to, W; by default the events' height */
  heightW?: number;
  /** The sheet does not know the sample's heat capacity */
  heatCapacityUnknown?: boolean;
}

/** Records a simulated scan and reduces it with the truth about its instrument on the sheet. */
export function reduceModel(model: ScanModel, as: RecordedAs, random: Random): ReduceOutcome {
  const { instrument, massKg, selfHeating } = model;
  const solution = solveScan(model, samplingTimes(0, model.programme.endS, as.rows, as.uneven));
  const recorded = recordScan(solution, instrument.offsetK, as.recording, random, as.heightW);
  const calibration: InstrumentCalibration = {
    instrument: 'simulated',
    kind: as.kind ?? 'furnace',
    source: 'sheet',
    offsetK: instrument.offsetK,
    offsetSeK: 0.1,
    // Standards feel the contact as well: it delays an onset like the rest of the shift.
    lagS: instrument.shiftS + instrument.responseS + (selfHeating?.contactS ?? 0),
    lagSeS: 0.05 * instrument.shiftS,
    responseS: instrument.responseS,
    standards: 0,
    ...(selfHeating && { resistanceKPerW: selfHeating.contactS / (massKg * selfHeating.heatCapacityJPerKgK) }),
  };
  const heatCapacity =
    selfHeating && !as.heatCapacityUnknown ? { heatCapacityJPerKgK: selfHeating.heatCapacityJPerKgK } : {};
  return reduceScan(
    {
      timeS: recorded.timeS,
      temperatureK: recorded.temperatureK,
      heatFlow: recorded.heatFlowW,
      heatFlowUnit: 'W',
      columns: [],
      dialect: 'simulated',
      flags: [],
    },
    { file: 'simulated', sample: 'simulated', role: 'sample', exotherm: 'up', massKg, calibration, ...heatCapacity },
  );
}
