import type { CampaignStatus, CoverageRow, GapRow } from '../../schema/wire/campaign.ts';
import { FLAG_CODES } from '../../schema/wire/flags.ts';
import type { AdviceRow } from '../../schema/wire/forecasts.ts';
import type { Role, SampleState, ScanState } from '../../schema/wire/states.ts';
import type { FlagRow, ScanRow } from '../client/rows.ts';
import { flagMeaning } from '../words.ts';
import { type EventEnergies, type EventNumbers, energiesBySample, numbersBySample } from './headline.ts';

/** How a mark is drawn: full when the scan gives results, hollow while it waits, struck out when it gives none. */
export type MarkLook = 'full' | 'hollow' | 'struck';

/** One scan (file and segment) on the map, with its row for each event. */
export interface ScanMark {
  key: string;
  file: string;
  instrument: string;
  status: ScanState;
  look: MarkLook;
  /** Measured where known, else nominal; always positive; null when neither is known. K/s */
  rateKPerS: number | null;
  isCooling: boolean;
  /** The worst flag that asks for a look. */
  concern?: 'stop' | 'warn';
  rows: ScanRow[];
}

export interface LedgerRow {
  sample: string;
  role: Role;
  state?: SampleState;
  reason?: string;
  verdict?: string;
  marks: ScanMark[];
  gaps: GapRow[];
  emptySpans: EmptySpan[];
  /** The scan that would narrow an interval most, K/s */
  advisedKPerS?: number;
  numbers: EventNumbers[];
  /** E over conversion by the headline method */
  energies: EventEnergies[];
  /** What asks for a look at the sample as a whole, in words. */
  concerns: string[];
}

const LOOKS: Record<ScanState, MarkLook | undefined> = {
  received: 'hollow',
  read: 'hollow',
  reduced: 'full',
  set_aside: 'struck',
  failed: 'struck',
  excluded: 'struck',
  unassigned: undefined,
  superseded: undefined,
};

function concernOf(rows: readonly ScanRow[]): 'stop' | 'warn' | undefined {
  let concern: 'warn' | undefined;
  for (const row of rows)
    for (const code of row.flags) {
      const severity = FLAG_CODES[code]?.[0];
      if (severity === 'stop') return 'stop';
      if (severity === 'warn') concern = 'warn';
    }
  return concern;
}

function markOf(rows: ScanRow[], look: MarkLook): ScanMark {
  const [first] = rows;
  const signed = first.rate_K_per_s ?? first.rate_nominal_K_per_s;
  return {
    key: `${first.file} ${first.segment} ${first.instrument}`,
    file: first.file,
    instrument: first.instrument ?? 'no instrument named',
    status: first.status,
    look,
    rateKPerS: signed === null || signed === 0 ? null : Math.abs(signed),
    isCooling: signed !== null && signed < 0,
    concern: look === 'struck' ? undefined : concernOf(rows),
    rows,
  };
}

/** A run of decades without a scan, K/s. */
export interface EmptySpan {
  lowKPerS: number;
  highKPerS: number;
  decades: number;
}

/** Runs of empty decades between the lowest and the highest filled one of a sample. */
export function emptySpans(rows: readonly CoverageRow[]): EmptySpan[] {
  const filled = rows
    .filter((row) => row.scan_count > 0)
    .map((row) => Math.round(Math.log10(row.decade_low_K_per_s)))
    .sort((a, b) => a - b);
  return filled.flatMap((decade, i) => {
    const decades = (filled[i + 1] ?? decade) - decade - 1;
    return decades > 0 ? [{ lowKPerS: 10 ** (decade + 1), highKPerS: 10 ** (decade + 1 + decades), decades }] : [];
  });
}

/** The mark under the pointer or the keyboard: places in the rows and in the marks of that row. */
export interface ActiveMark {
  row: number;
  mark: number;
}

/** Meanings of those warnings of a sample that belong to no single file, gaps left out. */
function concernsOf(flags: readonly FlagRow[], gaps: readonly GapRow[]): string[] {
  const own = flags.filter((flag) => !flag.file && flag.severity !== 'note');
  const codes = own.map((flag) => flag.code).filter((code) => !gaps.some((gap) => gap.code === code));
  return [...new Set(codes)].map(flagMeaning);
}

/** Rows of each sample; those of none under ''. */
export function rowsBySample<Row extends { sample: string | null }>(rows: readonly Row[]): Map<string, Row[]> {
  const groups = new Map<string, Row[]>();
  for (const row of rows) {
    const group = groups.get(row.sample ?? '');
    if (group) group.push(row);
    else groups.set(row.sample ?? '', [row]);
  }
  return groups;
}

const isSameScan = (a: ScanRow, b: ScanRow): boolean =>
  a.segment === b.segment && a.sample === b.sample && a.instrument === b.instrument;

/** Rows of each scan: one file may hold several segments, and may stand for several samples. */
function groupScans(rows: readonly ScanRow[]): ScanRow[][] {
  const groups: ScanRow[][] = [];
  const byFile = new Map<string, ScanRow[][]>();
  for (const row of rows) {
    const ofFile = byFile.get(row.file);
    const same = ofFile?.find(([first]) => isSameScan(first, row));
    if (same) {
      same.push(row);
      continue;
    }
    const group = [row];
    groups.push(group);
    if (ofFile) ofFile.push(group);
    else byFile.set(row.file, [group]);
  }
  return groups;
}

export interface LedgerTables {
  scans: readonly ScanRow[];
  coverage: readonly CoverageRow[];
  gaps: readonly GapRow[];
  flags: readonly FlagRow[];
  parameters: Parameters<typeof numbersBySample>[0];
  advice?: readonly AdviceRow[];
}

/** Scans that are worked on between two steps of `ledgerSteps`: a millisecond or two. */
const SCANS_PER_STEP = 250;

/** Rows of the map: samples in the order of the status, then what else was measured (standards, blanks). */
export function buildLedger(tables: LedgerTables, status: Pick<CampaignStatus, 'samples'> | undefined): LedgerRow[] {
  const steps = ledgerSteps(tables, status);
  for (let step = steps.next(); ; step = steps.next()) if (step.done) return step.value;
}

/** The same in steps, for a page that must stay quick while thousands of scans are sorted. */
export function* ledgerSteps(
  tables: LedgerTables,
  status: Pick<CampaignStatus, 'samples'> | undefined,
): Generator<undefined, LedgerRow[]> {
  const rows = new Map<string, LedgerRow>();
  const rowOf = (sample: string, role: Role): LedgerRow => {
    const key = `${role}\u0000${sample}`;
    let row = rows.get(key);
    if (!row)
      rows.set(
        key,
        (row = { sample, role, marks: [], gaps: [], emptySpans: [], numbers: [], energies: [], concerns: [] }),
      );
    return row;
  };
  for (const { sample, state, reason, verdict } of status?.samples ?? [])
    Object.assign(rowOf(sample, 'sample'), { state, reason, verdict });

  const groups = groupScans(tables.scans);
  yield;
  for (const [i, scanRows] of groups.entries()) {
    if (i % SCANS_PER_STEP === 0) yield;
    const [{ sample, role, status: scanStatus }] = scanRows;
    const look = LOOKS[scanStatus];
    if (sample !== null && look) rowOf(sample, role ?? 'sample').marks.push(markOf(scanRows, look));
  }

  yield;
  const gaps = rowsBySample(tables.gaps);
  const flags = rowsBySample(tables.flags);
  const advice = rowsBySample(tables.advice ?? []);
  const coverage = rowsBySample(tables.coverage);
  const numbers = numbersBySample(tables.parameters);
  yield;
  const energies = energiesBySample(tables.parameters);
  for (const row of rows.values()) {
    yield;
    row.marks.sort((a, b) => (a.rateKPerS ?? 0) - (b.rateKPerS ?? 0) || (a.instrument < b.instrument ? -1 : 1));
    if (row.role !== 'sample') continue;
    row.gaps = gaps.get(row.sample) ?? [];
    row.concerns = concernsOf(flags.get(row.sample) ?? [], row.gaps);
    row.emptySpans = emptySpans(coverage.get(row.sample) ?? []);
    row.advisedKPerS = advice.get(row.sample)?.find(({ rank }) => rank === 1)?.rate_K_per_s;
    row.numbers = numbers.get(row.sample) ?? [];
    row.energies = energies.get(row.sample) ?? [];
  }
  return [...rows.values()].sort((a, b) => Number(a.role !== 'sample') - Number(b.role !== 'sample'));
}

/** Names of the instruments in a fixed order: that order decides shape and colour. */
export const instrumentNames = (rows: readonly LedgerRow[], known: readonly string[]): string[] =>
  [...new Set([...known, ...rows.flatMap((row) => row.marks.map((mark) => mark.instrument))])].sort((a, b) =>
    a < b ? -1 : 1,
  );
