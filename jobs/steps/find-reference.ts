import { quote } from '../../schema/wire/flags.ts';
import type { Ports } from '../ports/index.ts';
import { type FileRow, findNamedFiles, type ReductionRows } from '../store/scan-rows.ts';
import { compareText, indexFiles } from './assign-scans.ts';

/** Why the reference that a row names cannot be subtracted, and what to do. */
export interface ReferenceProblem {
  problem: string;
  action: string;
}

/** The blank or rescan that a scan's row names, or why there is none to be used; undefined where the row names none. */
export async function findReference(
  ports: Ports,
  { scan, file }: ReductionRows,
): Promise<FileRow | ReferenceProblem | undefined> {
  const name = scan.sheetRow?.reference;
  if (name === undefined || scan.role !== 'sample') return undefined;
  const candidates = await findNamedFiles(ports, file.campaignId, name);
  candidates.sort((a, b) => compareText(a.path, b.path));
  const found = indexFiles(candidates)(name);
  if (found.length === 0) {
    return {
      problem: `its reference ${quote(name)} did not come`,
      action: 'Send that file, correct the name in scans.csv, or leave the reference empty.',
    };
  }
  if (new Set(found.map((one) => one.sha256)).size > 1) {
    return {
      problem: `its reference ${quote(name)} is the name of ${found.length} files: ${found.map((one) => quote(one.path)).join(', ')}`,
      action: 'Write the whole path below the campaign folder in scans.csv.',
    };
  }
  const { row } = found[0];
  if (row.state === 'failed') return unreadable(row.path, row.reason ?? 'unreadable');
  if (row.sha256 === file.sha256) {
    return { problem: `its reference ${quote(name)} is the scan itself`, action: 'Name a blank or a rescan.' };
  }
  return row;
}

export const unreadable = (path: string, reason: string): ReferenceProblem => ({
  problem: `its reference ${quote(path)} could not be read: ${reason}`,
  action: 'Send that file again, or leave the reference empty.',
});
