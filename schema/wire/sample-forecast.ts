import type { Flag } from './flags.ts';
import type { AdviceRow, ForecastRow, ForecastSource, GoalRow, ProgrammeTable } from './forecasts.ts';
import type { FitScan, ModelFreeFit, ParameterRow } from './parameters.ts';
import type { InstrumentCalibration } from './scan.ts';
import type { GlassFacts, InstrumentRange, JudgeResult } from './verdicts.ts';

/** What the forecasts and the advice of one sample are made from: results of the steps before, and the campaign's questions. */
export interface SampleForecastInput {
  sample: string;
  facts: GlassFacts;
  /** Fit of the sample */
  parameters: ParameterRow[];
  modelFree: ModelFreeFit[];
  judged: Pick<JudgeResult, 'verdicts' | 'sharedLaws'>;
  goals: GoalRow[];
  programmes: ProgrammeTable[];
  /** Scans as the fit had them, and every instrument of the campaign: where the next scan could be run */
  scans: FitScan[];
  instruments: InstrumentCalibration[];
  ranges: InstrumentRange[];
}

export interface SampleForecastResult {
  sources: ForecastSource[];
  forecasts: ForecastRow[];
  advice: AdviceRow[];
  /** Critical rates */
  parameters: ParameterRow[];
  flags: Flag[];
}
