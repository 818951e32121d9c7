import type { Flag } from './flags.ts';
import type { ExothermDirection, InstrumentKind, Role } from './states.ts';

/** What the reader makes of one file: columns in SI, all of one length, time strictly increasing. */
export interface ReadScan {
  /** s */
  timeS: Float64Array;
  /** K */
  temperatureK: Float64Array;
  /** In `heatFlowUnit`; the sign is the file's own. */
  heatFlow: Float64Array;
  /** W; W/kg (= mW/g: multiply W/g by 1000); V for a thermocouple signal that needs the instrument's sensitivity. */
  heatFlowUnit: 'W' | 'W/kg' | 'V';
  /** Said by the file's own header words, if at all. */
  exotherm?: ExothermDirection;
  /** How each used column was understood, for `run --dry` and the page. */
  columns: { quantity: 'time' | 'temperature' | 'heat flow'; header: string; unit: string }[];
  /** Dialect in words, e.g. `UTF-8, semicolon, decimal comma, header line 12`. */
  dialect: string;
  flags: Flag[];
}

/** A file that could not be read: why (quotes what was found, with the line), and what to do next. */
export interface ReadRefusal {
  code: 'file-damaged' | 'unit-unknown';
  reason: string;
  action: string;
  line?: number;
}

export type ReadOutcome = { ok: true; scan: ReadScan } | { ok: false; refusal: ReadRefusal };

/** One row of `scans.csv`, SI. `line` is its line in the sheet. */
export interface ScanSheetRow {
  file: string;
  sample: string;
  instrument: string;
  role: Role;
  rateKPerS?: number;
  massKg?: number;
  exotherm?: ExothermDirection;
  replicate?: string;
  segment?: number;
  reference?: string;
  note?: string;
  /** By correction only: where the event's baseline is tied, K, lower and upper */
  limitsK?: [number, number];
  /** By correction only: why the scan stays out */
  excluded?: string;
  /** 0 where no sheet has such a row */
  line: number;
}

/** One row of `instruments.csv`, SI. */
export interface InstrumentSheetRow {
  instrument: string;
  kind?: InstrumentKind;
  lagS?: number;
  lagErrorS?: number;
  offsetK?: number;
  offsetErrorK?: number;
  rateMinKPerS?: number;
  rateMaxKPerS?: number;
  responseS?: number;
  /** V/W */
  sensitivityVPerW?: number;
  line: number;
}

/** One row of `samples.csv`, SI. */
export interface SampleSheetRow {
  sample: string;
  meltingK?: number;
  meltingEnthalpyJPerKg?: number;
  crystallizationEnthalpyJPerKg?: number;
  glassTransitionK?: number;
  fragility?: number;
  molarMassKgPerMol?: number;
  growthRateMPerS?: number;
  growthTemperatureK?: number;
  series?: string;
  solventFraction?: number;
  heatCapacityJPerKgK?: number;
  cooledAtHeatingRate?: boolean;
  line: number;
}

/** Correction of an instrument as applied to every sample scan: T_true = T_measured − offset − τ β. */
export interface InstrumentCalibration {
  instrument: string;
  kind: InstrumentKind;
  source: 'standards' | 'sheet' | 'prior';
  offsetK: number;
  offsetSeK: number;
  /** Net lag τ (shift + response), s. */
  lagS: number;
  lagSeS: number;
  /** The part of τ that is a first-order response of the signal, s; undefined = not known. */
  responseS?: number;
  /** V/W */
  sensitivityVPerW?: number;
  /** Number of standards scans behind it */
  standards: number;
  /** K/K: the offset at temperature T is offsetK + offsetSlope (T − offsetAtK); two or more metals only */
  offsetSlope?: number;
  offsetAtK?: number;
  /** Covariance of (offset, lag, offset slope), row-major 3 × 3, K, s and K/K */
  covariance?: number[];
  /** True heat ÷ measured heat (ASTM E968) */
  heatFactor?: number;
  heatFactorSe?: number;
  /** Thermal resistance between sample and sensor, from the leading edges of the standards, K/W */
  resistanceKPerW?: number;
}
