import type { CoverageRow, GapRow } from '../../schema/wire/campaign.ts';
import type { CurveKind } from '../../schema/wire/curve-kinds.ts';
import type { AdviceRow, ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { SampleState } from '../../schema/wire/states.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import type { FlagRow, InstrumentRow, ScanRow } from '../client/rows.ts';
import type { Curves } from '../model/curves.ts';

/** All that a report says. Rows are keyed as the API and the CSV files key them, missing is null; the report reads nothing else. */
export interface ReportData {
  campaign: string;
  tables: {
    scans: readonly ScanRow[];
    parameters: readonly ParameterRow[];
    instruments: readonly InstrumentRow[];
    coverage: readonly CoverageRow[];
    gaps: readonly GapRow[];
    flags: readonly FlagRow[];
    verdicts?: readonly VerdictRow[];
    forecasts?: readonly ForecastRow[];
    advice?: readonly AdviceRow[];
  };
  /** In the order in which they are to stand */
  samples: readonly ReportSample[];
  provenance: ReportProvenance;
}

export interface ReportSample {
  sample: string;
  state: SampleState;
  reason?: string;
}

/** Curves of one sample as GET /v1/samples/:id/curves gives them; a kind that is missing is left out. */
export type SampleCurves = Partial<Record<CurveKind, Curves>>;

export interface ReportProvenance {
  /** Version of the program */
  version: string;
  /** Versions of the steps whose results these are */
  stepVersions: Readonly<Record<string, number>>;
  /** Draws of the Monte Carlo behind each interval */
  draws: number;
  /** Seed of each sample's draws, hex */
  seeds: Readonly<Record<string, string>>;
  /** Every input with its SHA-256, hex */
  inputs: readonly { file: string; sha256: string }[];
  /** Moment of the last change of the campaign, ISO 8601, where known: the report reads no clock */
  changedAt?: string;
  /** Says that the data are made up, e.g. for the demo */
  isSynthetic?: boolean;
}
