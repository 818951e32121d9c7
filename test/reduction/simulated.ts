import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import {
  arrheniusLawWithPeak,
  jmakLaw,
  type RecordingSettings,
  rampProgramme,
  recordScan,
  type ScanModel,
  samplingTimes,
  seededRandom,
  solveScan,
} from '../study/generator/index.ts';

/** Truth from the independent generator; E = 280 kJ/mol, n = 3, peak near 700 K at 20 K/min, width near 11.5 K. */
export function model(over: Partial<ScanModel> = {}): ScanModel {
  return {
    sample: {
      events: [{ temperature: arrheniusLawWithPeak(280e3, 700, 1 / 3), rate: jmakLaw(3), enthalpyJPerKg: 45e3 }],
    },
    instrument: { offsetK: 0, shiftS: 0, responseS: 0 },
    programme: rampProgramme(560, 800, 1 / 3),
    massKg: 10e-6,
    ...over,
  };
}

export function scanOf(m: ScanModel, recording: RecordingSettings, points = 3000, sign = 1): ReadScan {
  const random = seededRandom('reduction');
  const solution = solveScan(m, samplingTimes(0, m.programme.endS, points));
  const recorded = recordScan(solution, m.instrument.offsetK, recording, random);
  return {
    timeS: recorded.timeS,
    temperatureK: recorded.temperatureK,
    heatFlow: recorded.heatFlowW.map((v) => sign * v),
    heatFlowUnit: 'W',
    columns: [],
    dialect: '',
    flags: [],
  };
}

export const input = (over: Partial<ReduceInput> = {}): ReduceInput => ({
  file: 'a.txt',
  sample: 'glass',
  role: 'sample',
  exotherm: 'up',
  massKg: 10e-6,
  calibration: {
    instrument: 'furnace',
    kind: 'furnace',
    source: 'sheet',
    offsetK: 0,
    offsetSeK: 0.1,
    lagS: 0,
    lagSeS: 0.1,
    responseS: 0,
    standards: 0,
  },
  ...over,
});
