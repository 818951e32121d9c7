import { reduceScan } from '../../jobs/reduction/index.ts';
import type { ReducedScan } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import {
  type Random,
  type RecordingSettings,
  recordScan,
  type ScanModel,
  samplingTimes,
  solveScan,
} from './generator/index.ts';

/** Records a simulated scan and reduces it with the truth about its instrument on the sheet. */
export function reduceModel(
  model: ScanModel,
  rows: number,
  recording: RecordingSettings,
  random: Random,
): ReducedScan | undefined {
  const { instrument } = model;
  const solution = solveScan(model, samplingTimes(0, model.programme.endS, rows));
  const recorded = recordScan(solution, instrument.offsetK, recording, random);
  const calibration: InstrumentCalibration = {
    instrument: 'simulated',
    kind: 'furnace',
    source: 'sheet',
    offsetK: instrument.offsetK,
    offsetSeK: 0.1,
    lagS: instrument.shiftS + instrument.responseS,
    lagSeS: 0.05 * instrument.shiftS,
    responseS: instrument.responseS,
    standards: 0,
  };
  const outcome = reduceScan(
    {
      timeS: recorded.timeS,
      temperatureK: recorded.temperatureK,
      heatFlow: recorded.heatFlowW,
      heatFlowUnit: 'W',
      columns: [],
      dialect: 'simulated',
      flags: [],
    },
    { file: 'simulated', sample: 'simulated', role: 'sample', exotherm: 'up', massKg: model.massKg, calibration },
  );
  return outcome.ok ? outcome.reduced : undefined;
}
