import { and, eq, inArray, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, instruments, scans, sheetRows } from '../../schema/tables/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { ReducedSummary } from '../../schema/wire/reduced-blob.ts';
import type { InstrumentCalibration, InstrumentSheetRow, SampleSheetRow } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { loadSheetRows } from './assignment-rows.ts';
import type { Statement } from './fence.ts';
import { touchInstruments, touchSamples } from './job-rows.ts';
import { type FileRow, loadLiveFiles } from './live-files.ts';
import { json, preparedOnce, text } from './statement.ts';

export type { FileRow } from './live-files.ts';
export type ScanRow = typeof scans.$inferSelect;

const fileById = preparedOnce((db) =>
  db
    .select()
    .from(files)
    .where(eq(files.id, sql.placeholder('id')))
    .prepare(),
);

export async function loadFile(ports: Ports, id: string): Promise<FileRow | undefined> {
  return (await fileById(ports.database.read).all({ id }))[0];
}

const scanSamples = (fileId: string) => sql`select sample from scans where file_id = ${fileId} and role = 'sample'`;

/** A data file was read: its scans go on. */
export function saveReadFile(file: FileRow, read: { highestRateKPerS: number; flags: Flag[] }): Statement[] {
  return [
    text`
      update files set state = 'read', reason = null, highest_rate_k_per_s = ${read.highestRateKPerS},
        flags = ${json(read.flags)} where id = ${file.id}`,
    text`update scans set status = 'read' where file_id = ${file.id} and status = 'received'`,
    // A faster scan may make a chip of what was taken for a furnace.
    text`
      update instruments set inputs_revision = inputs_revision + 1
      where campaign_id = ${file.campaignId} and highest_rate_k_per_s < ${read.highestRateKPerS}
        and json_extract(sheet_row, '$.kind') is null and calibration is not null
        and instrument in (select instrument from scans where file_id = ${file.id} and disposition = 'assigned')`,
  ];
}

/** A data file, sheet or archive could not be read: it and its scans are set aside with the reason. */
export function saveRefusedFile(db: LibSQLDatabase, file: FileRow, reason: string, flags: Flag[]): Statement[] {
  return [
    db.update(files).set({ state: 'refused', reason, flags }).where(eq(files.id, file.id)),
    db
      .update(scans)
      .set({ status: 'set_aside', reason })
      .where(and(eq(scans.fileId, file.id), sql`status in ('received', 'read', 'unassigned')`)),
    touchSamples(file.campaignId, scanSamples(file.id)),
  ];
}

/** The job of a file gave up. */
export function saveFailedFile(db: LibSQLDatabase, campaignId: string, fileId: string, reason: string): Statement[] {
  return [
    db.update(files).set({ state: 'failed', reason }).where(eq(files.id, fileId)),
    db
      .update(scans)
      .set({ status: 'failed', reason })
      .where(and(eq(scans.fileId, fileId), sql`status in ('received', 'read', 'unassigned')`)),
    touchSamples(campaignId, scanSamples(fileId)),
  ];
}

/** What reading the columns of a file, and a hash of what was read, takes. */
export type DataFile = Pick<FileRow, 'campaignId' | 'path' | 'sha256' | 'blobKey'>;

/** What a reduction reads of its scan and what its write-back asks for. */
export type ScanToReduce = Pick<
  ScanRow,
  'id' | 'campaignId' | 'sample' | 'instrument' | 'role' | 'segment' | 'sheetRow' | 'status' | 'inputsRevision'
>;

export interface ReductionRows {
  scan: ScanToReduce;
  file: DataFile;
  calibration: InstrumentCalibration | null;
  instrumentRow: InstrumentSheetRow | null;
  sampleRow: SampleSheetRow | null;
}

const selectReductions = (db: LibSQLDatabase) =>
  db
    .select({
      scan: {
        id: scans.id,
        campaignId: scans.campaignId,
        sample: scans.sample,
        instrument: scans.instrument,
        role: scans.role,
        segment: scans.segment,
        sheetRow: scans.sheetRow,
        status: scans.status,
        inputsRevision: scans.inputsRevision,
      },
      file: { campaignId: files.campaignId, path: files.path, sha256: files.sha256, blobKey: files.blobKey },
      calibration: instruments.calibration,
      instrumentRow: instruments.sheetRow,
      sampleRow: sql<SampleSheetRow | null>`(
        select ${sheetRows.body} from ${sheetRows} inner join ${files} sheet on sheet.id = ${sheetRows.fileId}
        where ${sheetRows.campaignId} = ${scans.campaignId} and ${sheetRows.sheet} = 'samples'
          and json_extract(${sheetRows.body}, '$.sample') = ${scans.sample}
        order by sheet.path, ${sheetRows.position} limit 1)`.mapWith((text: string) => JSON.parse(text)),
    })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .leftJoin(
      instruments,
      and(eq(instruments.campaignId, scans.campaignId), eq(instruments.instrument, scans.instrument)),
    );

export async function loadReduction(ports: Ports, scanId: string): Promise<ReductionRows | undefined> {
  return (await reductionOfScan(ports.database.read).all({ scanId }))[0];
}

const reductionOfScan = preparedOnce((db) =>
  selectReductions(db)
    .where(eq(scans.id, sql.placeholder('scanId')))
    .prepare(),
);

const readyReductions = preparedOnce((db) =>
  selectReductions(db)
    .where(
      and(
        eq(scans.fileId, sql.placeholder('fileId')),
        eq(scans.disposition, 'assigned'),
        inArray(scans.status, ['received', 'read']),
        sql`(${scans.role} = 'standard' or ${instruments.calibratedRevision} = ${instruments.inputsRevision} and
          (json_extract(${instruments.sheetRow}, '$.kind') is not null or ${instruments.highestRateKPerS} >= ${sql.placeholder('highestRateKPerS')}))`,
      ),
    )
    .prepare(),
);

/** Scans of a file just read that can be reduced at once: assigned, and standards or on an instrument that this file's rate does not change. */
export function loadReadyReductions(ports: Ports, file: FileRow, highestRateKPerS: number): Promise<ReductionRows[]> {
  return readyReductions(ports.database.read).all({ fileId: file.id, highestRateKPerS });
}

/** A live data file that a `reference` cell may mean. */
export interface ReferenceFile {
  id: string;
  path: string;
  sha256: string;
  row: FileRow;
}

/** Live data files whose path is `name` or ends with it. */
export async function findNamedFiles(ports: Ports, campaignId: string, name: string): Promise<ReferenceFile[]> {
  const rows = await loadLiveFiles(
    ports,
    campaignId,
    'data',
    sql`(${files.path} = ${name} or substr(${files.path}, -length(${name}) - 1) = '/' || ${name})`,
  );
  return rows.map((row) => ({ id: row.id, path: row.path, sha256: row.sha256, row }));
}

/** The row of samples.csv for one sample: the first, in the order of the assignment. */
export async function loadSampleRow(
  ports: Ports,
  campaignId: string,
  sample: string | null,
): Promise<SampleSheetRow | undefined> {
  if (sample === null) return undefined;
  return (await loadSheetRows<SampleSheetRow>(ports, campaignId, 'samples', sample))[0];
}

/** Stores what a reduction found, unless the scan's inputs have changed since they were loaded. */
export function saveReduction(
  scan: ScanToReduce,
  found: {
    status: 'reduced' | 'set_aside';
    reason: string | null;
    reducedKey: string;
    result: ReducedSummary | null;
    flags: Flag[];
  },
): Statement[] {
  return [
    text`
      update scans set status = ${found.status}, reason = ${found.reason}, reduced_key = ${found.reducedKey},
        result = ${json(found.result)}, event_numbers = null, flags = ${json(found.flags)}
      where id = ${scan.id} and inputs_revision = ${scan.inputsRevision} and status = 'read'`,
    ...(scan.role === 'sample' ? [touchSamples(scan.campaignId, text`${scan.sample}`)] : []),
    ...(scan.role === 'standard' ? [touchInstruments(scan.campaignId, text`${scan.instrument}`)] : []),
  ];
}

export function saveFailedScan(db: LibSQLDatabase, campaignId: string, scanId: string, reason: string): Statement[] {
  return [
    db
      .update(scans)
      .set({ status: 'failed', reason })
      .where(and(eq(scans.id, scanId), eq(scans.status, 'read'))),
    touchSamples(campaignId, sql`select sample from scans where id = ${scanId} and role = 'sample'`),
  ];
}
