import type { CorrectionField, CorrectionValue } from '../../schema/wire/corrections.ts';
import type { ScanSheetRow } from '../../schema/wire/scan.ts';
import type { StoredCorrection } from '../store/correction-rows.ts';
import { canonicalJson } from '../store/ids.ts';

/** What the sheet or the folder says of one file, before corrections; nothing where no row or folder names the file. */
export interface Said {
  file: { path: string; sha256: string };
  row: Partial<ScanSheetRow>;
}

/** What the corrections make of one `Said`. */
export interface Corrected<S extends Said> {
  said: S;
  /** The row that counts; undefined where nothing was corrected. */
  row?: Partial<ScanSheetRow>;
}

/** A correction that a later sheet has ended. */
export interface EndedCorrection {
  correction: StoredCorrection;
  /** The cell that counts now. */
  now: CorrectionValue;
}

export interface AppliedCorrections<S extends Said> {
  corrected: Corrected<S>[];
  ended: EndedCorrection[];
  /** Corrections whose row now names another sample or instrument. */
  moved: { id: string; sample: string | null; instrument: string | null }[];
}

/**
 * Lays corrections over what the sheets say. A correction belongs to a file's bytes and the segment that the sheet names for them;
 * where several rows name that segment, also to sample and instrument. It ends when its cell is another than when it was made.
 */
export function applyCorrections<S extends Said>(
  said: readonly S[],
  corrections: readonly StoredCorrection[],
): AppliedCorrections<S> {
  const ended: EndedCorrection[] = [];
  const moved: AppliedCorrections<S>['moved'] = [];
  const bySha = new Map<string, StoredCorrection[]>();
  for (const c of corrections) bySha.set(c.sha256, [...(bySha.get(c.sha256) ?? []), c]);
  const used = new Set<string>();
  const corrected = said.map((one): Corrected<S> => {
    const here = (bySha.get(one.file.sha256) ?? []).filter((c) => belongs(c, one, said));
    const row: Record<string, unknown> = {};
    for (const c of here) {
      const cell = cellOf(one.row, c.field);
      const stands = canonicalJson(cell) === canonicalJson(c.said);
      if (stands) row[c.field] = c.value;
      if (used.has(c.id)) continue;
      used.add(c.id);
      const { sample = null, instrument = null } = one.row;
      if (!stands) ended.push({ correction: c, now: cell });
      else if (sample !== c.sample || instrument !== c.instrument) moved.push({ id: c.id, sample, instrument });
    }
    return Object.keys(row).length === 0 ? { said: one } : { said: one, row: { ...one.row, ...row } };
  });
  return { corrected, ended, moved };
}

/** A cell of a row, null where it is empty. */
export const cellOf = (row: Partial<ScanSheetRow>, field: CorrectionField): CorrectionValue => row[field] ?? null;

function belongs(c: StoredCorrection, one: Said, all: readonly Said[]): boolean {
  const sameSegment = (s: Said) => s.file.sha256 === c.sha256 && (s.row.segment ?? null) === c.segment;
  if (!sameSegment(one)) return false;
  const named = (s: Said) => (s.row.sample ?? null) === c.sample && (s.row.instrument ?? null) === c.instrument;
  if (named(one)) return true;
  // A file whose row is gone for now: its corrections wait for the row.
  if (one.row.sample === undefined) return false;
  // The sheet renamed the sample or the instrument: still the same scan, unless another row is the one that was meant.
  return !all.some((s) => sameSegment(s) && named(s)) && all.filter(sameSegment).every((s) => alike(s, one));
}

const alike = (a: Said, b: Said): boolean => a.row.sample === b.row.sample && a.row.instrument === b.row.instrument;
