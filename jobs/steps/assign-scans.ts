import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import type { ScanSheetRow } from '../../schema/wire/scan.ts';
import type { ScanPlace } from '../store/assignment-rows.ts';
import type { StoredCorrection } from '../store/correction-rows.ts';
import { type AppliedCorrections, applyCorrections, type EndedCorrection } from './apply-corrections.ts';

/** A live data file. */
export interface AssignFile {
  id: string;
  path: string;
  sha256: string;
}

/** A scan as the sheets (or the folders) want it. */
export interface WantedScan extends ScanPlace<'assigned' | 'unassigned' | 'duplicate'> {
  /** What the sheet or the folder says, before corrections. */
  said: Partial<ScanSheetRow>;
  sheetRow: ScanSheetRow | null;
  /** SHA-256 of the files that its `reference` means: one, unless the name is missing or not unique. */
  referenceBytes: string[];
  reason: string | null;
  flags: Flag[];
}

export interface Assignment {
  scans: WantedScan[];
  /** Flags of the sheet itself: rows without a file, repeated rows. */
  flags: Flag[];
  /** Corrections that a sheet has ended, and those whose row names another sample or instrument now. */
  ended: EndedCorrection[];
  moved: AppliedCorrections<SaidOfFile>['moved'];
}

interface Claim {
  file: AssignFile;
  sample: string;
  instrument: string;
  /** Before corrections. */
  said: Partial<ScanSheetRow>;
  row: ScanSheetRow | null;
}

/** Order of text by code unit: the same on every machine. */
export const compareText = (a: string, b: string): number => (a < b ? -1 : a > b ? 1 : 0);

const baseName = (path: string) => path.slice(path.lastIndexOf('/') + 1);
/** A sheet written elsewhere may say `A\B.txt` or `./B.txt`; paths of files never hold either. */
const sheetPath = (name: string) => name.normalize('NFC').replaceAll('\\', '/').replace(/^\.\//, '');

/**
 * Which scans the files make, given the rows of the scans sheets, or undefined where no such sheet came: then the folder
 * layout decides. A pure function of what is there, so that the order of arrival cannot matter: of several files with the
 * same bytes for the same scan, the first by path is the scan and the others are duplicates.
 *
 * A row names its file by full path, or by base name when that means one content only. A file that no row names is a
 * duplicate where the same bytes are named under another path, else unassigned.
 */
export function assignScans(
  files: readonly AssignFile[],
  rows: readonly ScanSheetRow[] | undefined,
  layout: (path: string) => { sample: string; instrument: string } | undefined,
  corrections: readonly StoredCorrection[] = [],
): Assignment {
  const sorted = [...files].sort((a, b) => compareText(a.path, b.path));
  const flags: Flag[] = [];
  const said = rows === undefined ? claimByFolder(sorted, layout) : claimByRows(sorted, rows, flags);
  const named = new Set(said.map((claim) => claim.file.id));
  const unnamed = sorted.filter((file) => !named.has(file.id)).map((file) => ({ file, row: {} }));
  const applied = applyCorrections([...said, ...unnamed], corrections);
  const claims = applied.corrected.flatMap(({ said, row }) => claimOf(said, row));
  claims.sort((a, b) => compareText(a.file.path, b.file.path));

  const filesOf = indexFiles(sorted);
  const referencesOf = (row: ScanSheetRow | null) => (row?.reference === undefined ? [] : filesOf(row.reference));
  const references = new Set(claims.flatMap(({ row }) => referencesOf(row).map((file) => file.id)));
  const scans: WantedScan[] = [];
  const firstOf = new Map<string, Claim>();
  const pathOfBytes = new Map<string, string>();
  for (const claim of claims) {
    const { file, sample, instrument, said, row } = claim;
    const identity = JSON.stringify([file.sha256, sample, instrument, row?.segment ?? null]);
    const first = firstOf.get(identity);
    if (first && first.file.id === file.id) {
      flags.push(
        flag(
          'sheet-damaged',
          `Line ${row?.line} repeats line ${first.row?.line}: file ${quote(file.path)}, sample ${quote(sample)}, instrument ${quote(instrument)} and segment are the same. The first row counts.`,
          'Remove one of the two rows, or give them different segments.',
          { file: file.path, sample, instrument },
        ),
      );
      continue;
    }
    if (!first) {
      firstOf.set(identity, claim);
      if (!pathOfBytes.has(file.sha256)) pathOfBytes.set(file.sha256, file.path);
    }
    scans.push({
      fileId: file.id,
      disposition: first ? 'duplicate' : 'assigned',
      sample,
      instrument,
      role: row?.role ?? 'sample',
      segment: row?.segment ?? null,
      said,
      sheetRow: row,
      referenceBytes: referencesOf(row).map((reference) => reference.sha256),
      ...(first ? sameBytes(file, first.file.path) : { reason: null, flags: [] }),
    });
  }

  const claimed = new Set(claims.map((claim) => claim.file.id));
  for (const file of sorted) {
    if (claimed.has(file.id)) continue;
    const otherPath = pathOfBytes.get(file.sha256);
    scans.push({
      fileId: file.id,
      disposition: otherPath === undefined ? 'unassigned' : 'duplicate',
      sample: null,
      instrument: null,
      role: 'sample',
      segment: null,
      said: {},
      sheetRow: null,
      referenceBytes: [],
      ...(otherPath !== undefined
        ? sameBytes(file, otherPath)
        : references.has(file.id)
          ? { reason: 'only named as the reference of other scans', flags: [] }
          : unassigned(file, rows !== undefined)),
    });
  }
  return { scans, flags, ended: applied.ended, moved: applied.moved };
}

/** A file with what a row or its folder says of it. */
interface SaidOfFile {
  file: AssignFile;
  row: Partial<ScanSheetRow>;
  /** Null where the folder says it. */
  sheetRow?: ScanSheetRow | null;
}

/** A claim on a file, where sample and instrument are known; `corrected` is the row that counts. */
function claimOf(
  { file, row: said, sheetRow = null }: SaidOfFile,
  corrected: Partial<ScanSheetRow> | undefined,
): Claim[] {
  const { sample, instrument } = corrected ?? said;
  if (sample === undefined || instrument === undefined) return [];
  const row = corrected
    ? { file: file.path, role: 'sample' as const, line: 0, ...corrected, sample, instrument }
    : sheetRow;
  return [{ file, sample, instrument, said, row }];
}

function claimByFolder(
  files: readonly AssignFile[],
  layout: (path: string) => { sample: string; instrument: string } | undefined,
): SaidOfFile[] {
  return files.flatMap((file) => {
    const found = layout(file.path);
    return found ? [{ file, row: { ...found, role: 'sample' as const } }] : [];
  });
}

/** Finds the files that a name means: the one of that path, else all of that base name. */
export function indexFiles<F extends { path: string }>(files: readonly F[]): (name: string) => F[] {
  const byPath = new Map(files.map((file) => [file.path, file]));
  const byBase = new Map<string, F[]>();
  for (const file of files) {
    const base = baseName(file.path);
    const group = byBase.get(base);
    if (group) group.push(file);
    else byBase.set(base, [file]);
  }
  return (name) => {
    const wanted = sheetPath(name);
    const exact = byPath.get(wanted);
    return exact ? [exact] : (byBase.get(wanted) ?? []);
  };
}

function claimByRows(files: readonly AssignFile[], rows: readonly ScanSheetRow[], flags: Flag[]): SaidOfFile[] {
  const filesOf = indexFiles(files);
  const claims: SaidOfFile[] = [];
  for (const row of rows) {
    const found = filesOf(row.file);
    const contents = new Set(found.map((file) => file.sha256)).size;
    if (contents === 1) {
      for (const file of found) claims.push({ file, row, sheetRow: row });
      continue;
    }
    const where = { file: row.file, sample: row.sample, instrument: row.instrument };
    if (contents === 0) {
      flags.push(
        flag(
          'file-missing',
          `Line ${row.line} of the scans sheet names ${quote(row.file)}, and no such file came.`,
          'Send the file, or correct the name in the sheet: the path below the campaign folder, or the bare file name when it is unique.',
          where,
        ),
      );
    } else {
      flags.push(
        flag(
          'file-missing',
          `Line ${row.line} of the scans sheet names ${quote(row.file)}, which ${found.length} files bear: ${found.map((file) => quote(file.path)).join(', ')}.`,
          'Write the whole path below the campaign folder in the sheet.',
          where,
        ),
      );
    }
  }
  return claims;
}

function sameBytes(file: AssignFile, otherPath: string): { reason: string; flags: Flag[] } {
  const reason = `same bytes as ${quote(otherPath)}`;
  return {
    reason,
    flags: [
      flag(
        'same-bytes',
        `${quote(file.path)} has the same bytes as ${quote(otherPath)} and is the same scan: it counts once.`,
        'Nothing, if the copy is meant; else send the right file under this name.',
        { file: file.path },
      ),
    ],
  };
}

function unassigned(file: AssignFile, sheetPresent: boolean): { reason: string; flags: Flag[] } {
  const reason = sheetPresent
    ? 'no row of the scans sheet names this file'
    : 'there is no scans sheet, and the path has not the layout SAMPLE/INSTRUMENT/file';
  return {
    reason,
    flags: [
      flag(
        'file-unassigned',
        `${quote(file.path)}: ${reason}.`,
        sheetPresent
          ? 'Add a row for it to scans.csv with file, sample and instrument, and send the sheet again.'
          : 'Send a scans.csv that names it with sample and instrument, or put the file into SAMPLE/INSTRUMENT/.',
        { file: file.path },
      ),
    ],
  };
}
