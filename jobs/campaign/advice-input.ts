import type { FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { SharedLaw, SharedLawDraws } from '../../schema/wire/shared-law.ts';
import type { InstrumentRange, Verdict } from '../../schema/wire/verdicts.ts';

/** What the next scan is to narrow. `now`: the 95 % width that the results show, in the unit of advice.csv; without it the linearised one is taken. */
export type AdviceGoal =
  | { goal: 'energy'; now?: number }
  | { goal: 'bend'; now?: number }
  | { goal: 'forecast'; conversion: number; temperatureK: number; now?: number };

export interface AdviceInput {
  sample: string;
  event: number;
  /** Heating scans of the event, as the fit had them */
  scans: FitScan[];
  instruments: InstrumentCalibration[];
  /** What each instrument can run, from its sheet; the usual range of its kind where it says nothing */
  ranges: InstrumentRange[];
  /** J/mol, E at α = 0.5 */
  energyJPerMol: number;
  avramiExponent: number;
  /** Which law the forecasts rest on; without one the bend and all lags count as free */
  verdict?: Verdict;
  meltingK?: number;
  law?: SharedLaw;
  lawDraws?: SharedLawDraws;
  goals: AdviceGoal[];
}
