import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import type { FlagCode, Severity } from '../../schema/wire/flags.ts';
import type { RESULT_TABLES, ResultTable } from '../../schema/wire/result-tables.ts';
import type { JobState, Role, ScanState } from '../../schema/wire/states.ts';

type Column<Table extends ResultTable> = (typeof RESULT_TABLES)[Table][number];

/** A row as the API sends it: keys are the columns of the table, missing is null. */
type Row<Table extends ResultTable, Known extends Partial<Record<Column<Table>, unknown>>> = Known &
  Record<Exclude<Column<Table>, keyof Known>, number | null>;

export type ScanRow = Row<
  'scans',
  {
    file: string;
    sha256: string;
    sample: string | null;
    instrument: string | null;
    role: Role | null;
    status: ScanState;
    reason: string | null;
    flags: FlagCode[];
    replicate: string | null;
  }
>;

export type InstrumentRow = Row<
  'instruments',
  { instrument: string; kind: string | null; source: 'standards' | 'sheet' | 'prior' }
>;

export type FlagRow = Row<
  'flags',
  {
    severity: Severity;
    code: FlagCode;
    sample: string | null;
    instrument: string | null;
    file: string | null;
    detail: string;
    action: string;
  }
>;

export interface Campaign {
  id: string;
  name: string;
  created_at: string;
}

/** The status as the API sends it: with the ids of the samples. */
export type StatusSample = CampaignStatus['samples'][number] & { id: string };
export type Status = Omit<CampaignStatus, 'samples'> & { samples: StatusSample[] };

export interface SampleView {
  id: string;
  sample: string;
  scans: { id: string; file: string; instrument: string; status: ScanState }[];
}

export interface JobRow {
  id: string;
  step: string;
  /** Id of the file, scan, sample or campaign that the step works on */
  subject: string;
  state: JobState;
  attempts: number;
  last_error: string | null;
  next_try_at: string;
  created_at: string;
  started_at: string | null;
  finished_at: string | null;
}

export interface FileOutcome {
  file: string;
  outcome: 'accepted' | 'known' | 'replaced' | 'sheet' | 'archive' | 'refused';
  scan_ids?: string[];
  job_id?: string;
  reason?: string;
}
