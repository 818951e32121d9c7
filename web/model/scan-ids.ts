import type { SampleView, ScanRow } from '../client/rows.ts';

/**
 * Id of the scan behind each row. Rows name file and instrument; segments of one file are told apart by their order, which is that of
 * the list.
 */
export function identifyScans(rows: readonly ScanRow[], listed: SampleView['scans']): Map<ScanRow, string> {
  const ids = new Map<ScanRow, string>();
  for (const row of rows) {
    const own = rows.filter((other) => other.file === row.file && other.instrument === row.instrument);
    const segments = [...new Set(own.map((other) => other.segment))].sort((a, b) => (a ?? 0) - (b ?? 0));
    const candidates = listed.filter((scan) => scan.file === row.file && scan.instrument === row.instrument);
    const found = candidates[segments.indexOf(row.segment)] ?? candidates[0];
    if (found) ids.set(row, found.id);
  }
  return ids;
}
