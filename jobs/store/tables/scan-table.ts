import { eq, inArray, sql } from 'drizzle-orm';
import { files, scans } from '../../../schema/tables/index.ts';
import { type Flag, quote } from '../../../schema/wire/flags.ts';
import type { PeakSheetRow } from '../../../schema/wire/forecasts.ts';
import type { ReducedSummary } from '../../../schema/wire/reduced-blob.ts';
import type { Ports } from '../../ports/index.ts';
import { loadPeakRows } from '../fit-rows.ts';
import { loadLiveFiles } from '../live-files.ts';
import { allRows, text } from '../statement.ts';
import type { ResultRow } from './result-row.ts';

export interface ScanRecord {
  scanId: string;
  fileId: string;
  path: string;
  sha256: string;
  bytes: number;
  blobKey: string;
  sample: string | null;
  instrument: string | null;
  role: string;
  segment: number | null;
  sheetRow: { rateKPerS?: number; massKg?: number; replicate?: string } | null;
  status: string;
  reason: string | null;
  reducedKey: string | null;
  result: ReducedSummary | null;
  eventNumbers: number[] | null;
  flags: Flag[];
  fileFlags: Flag[];
  /** The name that stands in the place of a superseded file, where it is another than its own. */
  replacedBy: string | null;
}

/** Text by code unit, missing first: the same order on every machine. */
export const compareCells = (a: string | number | null, b: string | number | null): number => {
  if (a === b) return 0;
  if (a === null) return -1;
  if (b === null) return 1;
  return a < b ? -1 : 1;
};

/** Of a file that no longer counts: the name under which its path came later, where the two differ (`x.txt` and `x.txt.gz`). */
const REPLACED_BY = sql<string | null>`case when ${files.superseded} then (
  select coalesce(a.path, l.path) from files l left join files a on a.id = l.archive_id
  where l.campaign_id = ${files.campaignId} and l.path = ${files.path} and l.superseded = 0 and coalesce(a.path, l.path) <>
    coalesce((select o.path from files o where o.id = ${files.archiveId}), ${files.path})) end`;

const RECORD = {
  scanId: scans.id,
  fileId: files.id,
  path: files.path,
  sha256: files.sha256,
  bytes: files.bytes,
  blobKey: files.blobKey,
  sample: scans.sample,
  instrument: scans.instrument,
  role: scans.role,
  segment: scans.segment,
  sheetRow: scans.sheetRow,
  status: scans.status,
  reason: scans.reason,
  reducedKey: scans.reducedKey,
  result: scans.result,
  eventNumbers: scans.eventNumbers,
  flags: scans.flags,
  fileFlags: files.flags,
  replacedBy: REPLACED_BY,
};

/** Records in memory at a time: a page of the table needs one such chunk, whatever the size of the campaign. */
const CHUNK = 200;

export async function loadScanRecord(ports: Pick<Ports, 'database'>, scanId: string): Promise<ScanRecord | undefined> {
  const rows: ScanRecord[] = await ports.database.read
    .select(RECORD)
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(eq(scans.id, scanId));
  return rows[0];
}

/** Scans of a campaign in the order of scans.csv: by path, bytes, segment, sample, instrument. */
export async function* readScanRecords(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  sample?: string,
): AsyncGenerator<ScanRecord> {
  const order = await allRows<Pick<ScanRecord, 'scanId' | 'path' | 'sha256' | 'segment' | 'sample' | 'instrument'>>(
    ports.database.read,
    text`
      select s.id as scanId, path, sha256, segment, sample, instrument from scans s join files f on f.id = file_id
      where s.campaign_id = ${campaignId} and ${sample === undefined ? text`1` : text`sample = ${sample}`}`,
  );
  order.sort(
    (a, b) =>
      compareCells(a.path, b.path) ||
      compareCells(a.sha256, b.sha256) ||
      compareCells(a.segment, b.segment) ||
      compareCells(a.sample, b.sample) ||
      compareCells(a.instrument, b.instrument),
  );
  for (let at = 0; at < order.length; at += CHUNK) {
    const ids = order.slice(at, at + CHUNK).map((row) => row.scanId);
    const rows: ScanRecord[] = await ports.database.read
      .select(RECORD)
      .from(scans)
      .innerJoin(files, eq(files.id, scans.fileId))
      .where(inArray(scans.id, ids));
    const byId = new Map(rows.map((row) => [row.scanId, row]));
    // One that was removed meanwhile is left out.
    for (const id of ids) {
      const row = byId.get(id);
      if (row) yield row;
    }
  }
}

/** Files without a scan that must still be seen: archives that could not be unpacked. */
async function loadRefusedArchives(ports: Pick<Ports, 'database'>, campaignId: string): Promise<ResultRow[]> {
  const rows = await loadLiveFiles(ports, campaignId, 'archive', sql`state in ('refused', 'failed')`);
  return rows.map((file) => ({
    ...EMPTY_ROW,
    file: file.path,
    sha256: file.sha256,
    status: file.state === 'refused' ? 'set_aside' : 'failed',
    reason: file.reason,
    flags: codesOf(file.flags),
  }));
}

/** Archives that no longer counted before they were unpacked: nothing else tells that they came. */
async function loadOvertakenArchives(ports: Pick<Ports, 'database'>, campaignId: string): Promise<ResultRow[]> {
  const rows = await allRows<{ path: string; sha256: string; replacedBy: string | null }>(
    ports.database.read,
    text`
      select path, sha256, (
        select l.path from files l where l.campaign_id = f.campaign_id and l.superseded = 0 and l.archive_id is null
          and f.path like '%.gz' and l.path = substr(f.path, 1, length(f.path) - 3)) as replacedBy
      from files f where campaign_id = ${campaignId} and kind = 'archive' and superseded = 1 and state = 'unread'`,
  );
  return rows.map(({ path, sha256, replacedBy }) => replacedRow(path, sha256, replacedBy));
}

/** What was found in a scan before its file was replaced depends on when that was: only that it was there is told. */
const replacedRow = (file: string, sha256: string, replacedBy: string | null): ResultRow => ({
  ...EMPTY_ROW,
  file,
  sha256,
  status: 'superseded',
  reason: replacedBy === null ? null : `${quote(replacedBy)} came later and stands in its place`,
});

const EMPTY_ROW: ResultRow = {
  file: null,
  sha256: null,
  sample: null,
  instrument: null,
  role: null,
  event: null,
  status: null,
  reason: null,
  rate_nominal_K_per_s: null,
  rate_K_per_s: null,
  mass_mg: null,
  glass_transition_K: null,
  onset_K: null,
  peak_K: null,
  end_K: null,
  width_K: null,
  enthalpy_J_per_g: null,
  flags: [],
  segment: null,
  replicate: null,
  centroid_K: null,
};

const codesOf = (flags: readonly Flag[], event?: number): string[] => [
  ...new Set(flags.filter((f) => f.event === undefined || event === undefined || f.event === event).map((f) => f.code)),
];

/** The number of a scan's own event over all scans of its sample. */
export function eventNumberOf(
  { result, eventNumbers }: Pick<ScanRecord, 'result' | 'eventNumbers'>,
  own: number,
): number {
  const at = result?.events.findIndex(({ event }) => event === own) ?? -1;
  return eventNumbers?.[at] ?? own;
}

const KG_TO_MG = 1e6;
const J_PER_KG_TO_J_PER_G = 1e-3;

/** Rows of scans.csv of one scan: one an event, or one with an empty event. */
export function scanRowsOf(scan: ScanRecord): ResultRow[] {
  if (scan.status === 'superseded') return [replacedRow(scan.path, scan.sha256, scan.replacedBy)];
  const { result, sheetRow } = scan;
  const analysed = result?.segments.find((segment) => segment.segment === result.segment);
  const massKg = result?.massKg ?? sheetRow?.massKg;
  const flags = [...scan.fileFlags, ...scan.flags];
  const common: ResultRow = {
    ...EMPTY_ROW,
    file: scan.path,
    sha256: scan.sha256,
    sample: scan.sample,
    instrument: scan.instrument,
    role: scan.sample === null ? null : scan.role,
    status: scan.status,
    reason: scan.reason,
    rate_nominal_K_per_s: sheetRow?.rateKPerS ?? null,
    rate_K_per_s: analysed?.rateKPerS ?? null,
    mass_mg: massKg === undefined ? null : massKg * KG_TO_MG,
    glass_transition_K: result?.glassTransitionK ?? null,
    segment: result?.segment ?? scan.segment,
    replicate: sheetRow?.replicate ?? null,
  };
  if (!result || result.events.length === 0) return [{ ...common, flags: codesOf(flags) }];
  return result.events.map((event) => ({
    ...common,
    event: eventNumberOf(scan, event.event),
    rate_K_per_s: event.rateKPerS,
    onset_K: event.onsetK,
    peak_K: event.peakK,
    end_K: event.endK,
    width_K: event.widthK,
    centroid_K: event.centroidK,
    enthalpy_J_per_g: event.enthalpyJPerKg === undefined ? null : event.enthalpyJPerKg * J_PER_KG_TO_J_PER_G,
    flags: codesOf(flags, event.event),
  }));
}

/** A row of peaks.csv: a scan of which only its temperatures are known. */
const peakRowOf = ({ path, sha256, row }: { path: string; sha256: string; row: PeakSheetRow }): ResultRow => ({
  ...EMPTY_ROW,
  file: path,
  sha256,
  sample: row.sample,
  instrument: row.instrument,
  role: 'sample',
  event: row.peakK === undefined ? null : (row.event ?? 1),
  status: 'reduced',
  rate_K_per_s: row.rateKPerS,
  glass_transition_K: row.glassTransitionK ?? null,
  onset_K: row.onsetK ?? null,
  peak_K: row.peakK ?? null,
  replicate: row.replicate ?? null,
});

/** Rows of scans.csv: those of scans, of peaks.csv and of archives that could not be unpacked, together in the order of paths. */
export async function* readScanTable(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  sample?: string,
): AsyncGenerator<ResultRow> {
  const others = (await loadPeakRows(ports, campaignId, sample)).map(peakRowOf);
  if (sample === undefined)
    others.push(...(await loadRefusedArchives(ports, campaignId)), ...(await loadOvertakenArchives(ports, campaignId)));
  // The sort is stable: rows of one file keep their order.
  others.sort((a, b) => compareCells(a.file as string, b.file as string));
  let next = 0;
  for await (const scan of readScanRecords(ports, campaignId, sample)) {
    while (next < others.length && compareCells(others[next].file as string, scan.path) < 0) yield others[next++];
    yield* scanRowsOf(scan);
  }
  yield* others.slice(next);
}
