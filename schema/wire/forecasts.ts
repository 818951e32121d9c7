import type { FlagCode } from './flags.ts';
import type { SharedLaw, SharedLawDraws } from './shared-law.ts';

/** The one place of the caution that stands on every forecast and advice: table, page, command line, report. */
export const FORECAST_CAUTION =
  'An aid to planning experiments, not a basis for process-safety, medical or release decisions; follow the applicable standards and qualified practice.';

/** Columns of forecasts.csv and advice.csv, in order (the columns behind `goal` and `interval_expected` are later additions). */
export const FORECAST_TABLES = {
  forecasts: [
    'sample',
    'event',
    'method',
    'conversion',
    'temperature_C',
    'program',
    'value',
    'unit',
    'lower95',
    'upper95',
    'beyond_measured_K',
    'flags',
    'question',
    'time_s',
    'goal',
    'beyond_measured_decades',
    'detail',
    'caution',
  ],
  advice: [
    'sample',
    'rank',
    'instrument',
    'rate_K_per_s',
    'goal',
    'interval_now',
    'interval_expected',
    'event',
    'unit',
    'scans_to_half',
    'sentence',
    'caution',
  ],
} as const satisfies Record<string, readonly string[]>;

/**
 * Model-free description of one event: all that is needed to integrate it along another programme. Segment k runs between two
 * neighbouring conversions of `conversions` (0.05 … 0.95; the first starts at 0) and needs
 * ∫ exp[−(E_k/R)(1/T − x0)] dt = exp(lnStep_k), E_k by Vyazovkin, averaged over the scans in the logarithm.
 */
export interface ModelFreeCurve {
  /** Upper end of each segment */
  conversions: Float64Array;
  /** J/mol, one a segment */
  energyJPerMol: Float64Array;
  /** ln of the time in s that the segment takes at 1/x0, one a segment */
  lnStep: Float64Array;
  /** Share of its segment that is done at conversion 0.01, 0.02 … 0.99; behind the last segment it runs above 1 */
  share: Float64Array;
  /** 1/K */
  x0PerK: number;
}

/** The same in the Monte Carlo draws, draw-major: value of segment k in draw d is [d × segments + k]. */
export interface ModelFreeDraws {
  energyJPerMol: Float64Array;
  lnStep: Float64Array;
}

/** Melting data for the driving force and for critical rates. */
export interface MeltingData {
  meltingK: number;
  /** J per mole of the unit that attaches; without it the driving force is left out (`driving-force-ignored`) */
  enthalpyJPerMol?: number;
}

/** What the fit and the verdict of a sample leave for its forecasts, one an event. */
export interface ForecastSource {
  sample: string;
  event: number;
  verdict?: 'straight' | 'instrument' | 'material' | 'undecided';
  /** n − p of the shared law's fit: bands are estimate ± t(0.975, n − p) × spread of the draws */
  degreesOfFreedom: number;
  /** The same of the model-free fit, where it differs */
  modelFreeDegreesOfFreedom?: number;
  lowestMeasuredK: number;
  highestMeasuredK: number;
  glassTransitionK?: number;
  /** Mass fraction of the solvent, of a sample in a composition series */
  solventFraction?: number;
  melting?: MeltingData;
  law?: SharedLaw;
  lawDraws?: SharedLawDraws;
  modelFree?: ModelFreeCurve;
  modelFreeDraws?: ModelFreeDraws;
}

/** A temperature programme, linear between its rows; time strictly increasing from its first row. */
export interface ProgrammeTable {
  /** File name, or empty for a table that came with a question */
  name: string;
  timeS: Float64Array;
  temperatureK: Float64Array;
}

export type ForecastQuestion =
  | { question: 'time_to_conversion'; conversion: number; temperatureK: number }
  | { question: 'time_to_conversion'; conversion: number; programme: ProgrammeTable }
  | { question: 'conversion_at_end'; temperatureK: number; timeS: number }
  | { question: 'conversion_at_end'; programme: ProgrammeTable }
  | { question: 'temperature_limit'; conversion: number; timeS: number };

/** One row of `goal.csv`, SI. What is left empty is what is asked for; a conversion alone is asked of every programme of the campaign. */
export interface GoalRow {
  sample: string;
  conversion?: number;
  temperatureK?: number;
  timeS?: number;
  /** Line of the sheet; missing for a goal set by the API */
  line?: number;
}

export type GoalAnswer = 'met' | 'not_met' | 'cannot_say';

/** One row of forecasts.csv; `value`, `lower95`, `upper95` in `unit` (s, 1 or °C). */
export interface ForecastRow {
  sample: string;
  event: number;
  method: 'model_free' | 'shared_law';
  conversion: number | null;
  temperature_C: number | null;
  program: string;
  /** null where there is none, e.g. a conversion that the programme does not reach; `detail` says why */
  value: number | null;
  unit: 's' | '1' | '°C';
  lower95: number | null;
  upper95: number | null;
  beyond_measured_K: number;
  flags: FlagCode[];
  question: ForecastQuestion['question'];
  time_s: number | null;
  goal: GoalAnswer | '';
  /** Decades of rate coefficient between the forecast's temperature and the nearest measured one */
  beyond_measured_decades: number;
  detail: string;
  /** FORECAST_CAUTION, so that a row taken out of its table keeps it */
  caution: string;
}

/** One row of `peaks.csv`, SI. */
export interface PeakSheetRow {
  sample: string;
  instrument: string;
  event?: number;
  rateKPerS: number;
  /** At least one of the temperatures is there */
  peakK?: number;
  onsetK?: number;
  glassTransitionK?: number;
  meltingK?: number;
  replicate?: string;
  /** 0.5 K where the sheet says nothing */
  peakErrorK: number;
  line: number;
}

/** One row of `viscosity.csv`. */
export interface ViscositySheetRow {
  sample: string;
  temperatureK: number;
  /** log10 of the viscosity in Pa s */
  log10PaS: number;
  line: number;
}

/** A `programs/*.csv` that was read; its rows stay in the file. */
export interface ProgramSheetRow {
  program: string;
  rows: number;
}

/** One row of advice.csv. Intervals are full 95 % widths in `unit`: kJ/mol (energy), 1 (bend B), decades of time (forecast). */
export interface AdviceRow {
  sample: string;
  rank: number;
  instrument: string;
  rate_K_per_s: number;
  goal: 'energy' | 'bend' | 'forecast';
  interval_now: number;
  interval_expected: number;
  event: number;
  unit: 'kJ/mol' | '1' | 'decades';
  /** Scans like this one that are expected to halve the interval; null where no number within reach does */
  scans_to_half: number | null;
  sentence: string;
  caution: string;
}
