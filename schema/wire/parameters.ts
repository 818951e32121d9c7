import type { Flag, FlagCode } from './flags.ts';
import type { ModelFreeCurve, ModelFreeDraws } from './forecasts.ts';
import type { ReducedEvent } from './reduced.ts';
import type { InstrumentCalibration } from './scan.ts';

/** One number of the consolidated table; units as there, not SI. */
export interface ParameterRow {
  sample: string;
  event: number;
  quantity: string;
  method: string;
  conversion: number | null;
  temperature_K: number | null;
  value: number;
  unit: string;
  lower95: number | null;
  upper95: number | null;
  scan_count: number;
  rate_min_K_per_s: number;
  rate_max_K_per_s: number;
  flags: FlagCode[];
  interval: 'monte_carlo' | 'student_t' | 'f_ratio';
  variant: '' | 'peak' | 'without_outliers' | 'full_response';
}

/** A reduced event as the fit of a sample sees it. */
export interface FitScan {
  /** File path, for flags. */
  file: string;
  sha256: string;
  segment: number;
  instrument: string;
  replicate?: string;
  event: ReducedEvent;
}

export interface FitInput {
  sample: string;
  scans: FitScan[];
  instruments: InstrumentCalibration[];
  /** 32-byte hash as hex: of sorted input hashes, sheet values, step version, settings. */
  seed: string;
  draws: number;
}

/** Why and how a fit ended, as data. */
export interface FitReport {
  event: number;
  method: string;
  converged: boolean;
  message: string;
  evaluations: number;
  residualRms: number | null;
  rows: number;
}

/** What the isoconversional fit of one event's heating scans leaves for forecasts: the description and its draws. */
export interface ModelFreeFit {
  event: number;
  curve: ModelFreeCurve;
  draws: ModelFreeDraws;
  /** n − p of the fit */
  degreesOfFreedom: number;
  /** K: temperatures of the event over its scans */
  lowestK: number;
  highestK: number;
}

export interface FitResult {
  state: 'fitted' | 'insufficient';
  reason?: string;
  parameters: ParameterRow[];
  reports: FitReport[];
  flags: Flag[];
  modelFree?: ModelFreeFit[];
}

/** Which parameters are the headline numbers of a sample: what narrows the table to each of them. */
export const HEADLINES = [
  { quantity: 'activation_energy', method: 'vyazovkin' },
  { quantity: 'activation_energy', method: 'kissinger' },
  { quantity: 'avrami_exponent' },
];
