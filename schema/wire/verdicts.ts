import type { Flag } from './flags.ts';
import type { FitScan, ParameterRow } from './parameters.ts';
import type { InstrumentCalibration, SampleSheetRow } from './scan.ts';
import type { SharedLaw, SharedLawDraws } from './shared-law.ts';

export const VERDICTS = ['straight', 'instrument', 'material', 'undecided'] as const;
export type Verdict = (typeof VERDICTS)[number];

/** One row of verdicts.csv; energies in kJ/mol, the bend is ln(E at the low-rate end / E at the high-rate end). */
export interface VerdictRow {
  sample: string;
  event: number;
  verdict: Verdict;
  bend: number | null;
  bend_lower99: number | null;
  bend_upper99: number | null;
  /** parametric bootstrap of the likelihood ratio, lags free in both laws */
  p_value: number | null;
  /** AICc of the better straight law − AICc of the better bent law: above 0 favours a bend */
  delta_aicc: number | null;
  energy_low_rate_kJ_per_mol: number | null;
  energy_high_rate_kJ_per_mol: number | null;
  /** names of the instruments judged on */
  instruments: string[];
  rate_min_K_per_s: number;
  rate_max_K_per_s: number;
  /** for `undecided`: the scans that would settle it */
  decides_next: string;
}

/** What the sheets and the other scans say of a sample; everything optional. */
export interface GlassFacts extends Omit<Partial<SampleSheetRow>, 'sample' | 'line'> {
  /** Glass transition seen on a heating scan (half-height midpoint), lag removed */
  glassTransitions?: { file: string; instrument: string; rateKPerS: number; temperatureK: number }[];
  /** Rows of viscosity.csv */
  viscosity?: { temperatureK: number; log10PaS: number }[];
  /** Compositions of the sample's series whose glass transition samples.csv gives; mass fraction of the solvent */
  compositions?: { solventFraction: number; glassTransitionK: number }[];
}

/** The rates an instrument can run, K/s; without it the usual range of its kind. */
export interface InstrumentRange {
  instrument: string;
  rateMinKPerS: number;
  rateMaxKPerS: number;
}

export interface JudgeInput {
  sample: string;
  scans: FitScan[];
  instruments: InstrumentCalibration[];
  facts: GlassFacts;
  ranges?: InstrumentRange[];
  /** hash as hex: of sorted input hashes, sheet values, step version, settings */
  seed: string;
  draws: number;
}

/** The four laws of the verdict: straight or bent, lags as calibrated or free. */
export const LAWS = ['A', 'L', 'G', 'GL'] as const;
export type LawName = (typeof LAWS)[number];

export interface LawEvidence {
  law: LawName;
  deviance: number;
  /** free parameters; values under a prior do not count */
  parameters: number;
  /** null where the scans are too few for the correction */
  aicc: number | null;
  energyJPerMol: number;
  bend: number;
}

/** What one instrument seems to add to the temperatures that calibration left. */
export interface LagEvidence {
  instrument: string;
  lagS: number;
  lagErrorS: number;
  /** one standard error that calibration allows; 0 = nothing is known and 0 is taken */
  allowedS: number;
  beyondCalibration: boolean;
}

/** The scans that narrow the bend's interval most, in the order they should be run. */
export interface DecidingScan {
  instrument: string;
  rateKPerS: number;
  scans: number;
}

/** A curve of a plot, as the API sends it. */
export interface PlotCurve {
  kind: 'kissinger' | 'energy' | 'growth' | 'viscosity';
  x: { quantity: string; unit: string };
  y: { quantity: string; unit: string };
  series: { name: string; instrument?: string; x: number[]; y: number[]; lower?: number[]; upper?: number[] }[];
}

/** Everything behind one row of verdicts.csv. */
export interface EventVerdict {
  row: VerdictRow;
  /** why it came out so, in a word: `interval`, `too-few-scans`, `interval-wide`, `peaks-only`, `fit-failed` */
  reason: string;
  /** plain words for the page and the report */
  sentences: string[];
  opinion: 'centroid' | 'peak';
  /** bend from the peak and from T at α = 0.5, lags free, where there are curves; 99 % half widths */
  otherOpinions: { of: 'peak' | 'half'; bend: number; halfWidth99: number }[];
  laws: LawEvidence[];
  lags: LagEvidence[];
  stateDiffers: boolean;
  degreesOfFreedom: number;
  deciding: DecidingScan[];
  /** half width of the bend's 99 % interval now, and expected with the deciding scans */
  halfWidthNow: number | null;
  halfWidthExpected: number | null;
  /** standardised residuals by instrument under the shared law: mean and spread, K */
  residuals: { instrument: string; scans: number; meanK: number; rmsK: number }[];
  plots: PlotCurve[];
}

export interface JudgeResult {
  verdicts: VerdictRow[];
  events: EventVerdict[];
  parameters: ParameterRow[];
  /** degreesOfFreedom: n − p of the law's fit */
  sharedLaws: { law: SharedLaw; draws: SharedLawDraws; degreesOfFreedom: number }[];
  flags: Flag[];
}
