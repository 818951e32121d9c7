import type { FlagCode, Severity } from '../../schema/wire/flags.ts';
import type { RESULT_TABLES, ResultTable } from '../../schema/wire/result-tables.ts';
import type { Role, ScanState } from '../../schema/wire/states.ts';

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

export interface FileOutcome {
  file: string;
  outcome: 'accepted' | 'known' | 'replaced' | 'sheet' | 'archive' | 'refused';
  scan_ids?: string[];
  job_id?: string;
  reason?: string;
}
