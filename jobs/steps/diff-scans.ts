import type { InstrumentSheetRow, SampleSheetRow } from '../../schema/wire/scan.ts';
import type { StoredScan } from '../store/assignment-rows.ts';
import { hashOf } from '../store/ids.ts';
import { compareText, type WantedScan } from './assign-scans.ts';

export interface HashedScan extends WantedScan {
  sheetHash: string;
}

export interface ScanChanges {
  insert: HashedScan[];
  update: { id: string; before: StoredScan; wanted: HashedScan }[];
  remove: StoredScan[];
}

/**
 * Hash of what the sheets say about a scan and its sample. Line numbers and how the row spells the file's name are left out:
 * a row that only moved is not a changed row.
 */
export function hashScanSheet(
  wanted: WantedScan,
  sampleRow: SampleSheetRow | undefined,
  instrumentRow: InstrumentSheetRow | undefined,
): string {
  const { disposition, sample, instrument, role, segment, reason, referenceBytes } = wanted;
  const row = wanted.sheetRow && { ...wanted.sheetRow, line: undefined, file: undefined };
  return hashOf([
    disposition,
    sample,
    instrument,
    role,
    segment,
    reason,
    row,
    sampleRow && { ...sampleRow, line: undefined },
    referenceBytes,
    // What a standard is reduced with before its instrument is calibrated.
    role === 'standard' ? (instrumentRow?.sensitivityVPerW ?? null) : null,
  ]);
}

/** What has to change for the stored scans to be the wanted ones. Scans keep their id where file and segment stay, whatever else changes. */
export function diffScans(stored: readonly StoredScan[], wanted: readonly HashedScan[]): ScanChanges {
  const changes: ScanChanges = { insert: [], update: [], remove: [] };
  const storedByFile = groupBy(stored, (scan) => scan.fileId);
  const wantedByFile = groupBy(wanted, (scan) => scan.fileId);
  for (const [fileId, left] of wantedByFile) {
    const old = [...(storedByFile.get(fileId) ?? [])].sort((a, b) => compareText(a.id, b.id));
    const take = (matches: (scan: StoredScan) => boolean): StoredScan | undefined => {
      const at = old.findIndex(matches);
      return at < 0 ? undefined : old.splice(at, 1)[0];
    };
    const pair = (want: HashedScan, before: StoredScan): void => {
      if (before.sheetHash !== want.sheetHash || before.status === 'superseded') {
        changes.update.push({ id: before.id, before, wanted: want });
      }
    };
    let rest = left.filter((want) => {
      const same = take((scan) => scan.sheetHash === want.sheetHash);
      if (same) pair(want, same);
      return !same;
    });
    rest = rest.filter((want) => {
      const same = take((scan) => scan.segment === want.segment);
      if (same) pair(want, same);
      return !same;
    });
    for (const want of rest) {
      const any = take(() => true);
      if (any) pair(want, any);
      else changes.insert.push(want);
    }
    changes.remove.push(...old);
  }
  return changes;
}

function groupBy<T>(items: readonly T[], keyOf: (item: T) => string): Map<string, T[]> {
  const groups = new Map<string, T[]>();
  for (const item of items) {
    const key = keyOf(item);
    const group = groups.get(key);
    if (group) group.push(item);
    else groups.set(key, [item]);
  }
  return groups;
}
