import { and, eq, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import {
  type Disposition,
  type FileState,
  files,
  flags,
  instruments,
  type ReadSheetName,
  samples,
  scans,
} from '../../schema/tables/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { PeakSheetRow } from '../../schema/wire/forecasts.ts';
import type { InstrumentSheetRow, SampleSheetRow, ScanSheetRow } from '../../schema/wire/scan.ts';
import type { Role, ScanState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import type { Statement } from './fence.ts';
import { createId } from './ids.ts';
import { touchSamples } from './job-rows.ts';
import { allRows, json, text } from './statement.ts';

export interface StoredFile {
  id: string;
  path: string;
  sha256: string;
  kind: string;
  state: FileState;
  reason: string | null;
}

/** Where a scan belongs. */
export interface ScanPlace<D extends Disposition = Disposition> {
  fileId: string;
  disposition: D;
  sample: string | null;
  instrument: string | null;
  role: Role;
  segment: number | null;
}

export interface StoredScan extends ScanPlace {
  id: string;
  said: Partial<ScanSheetRow> | null;
  sheetHash: string;
  status: ScanState;
}

export interface StoredInstrument {
  id: string;
  instrument: string;
  sheetRow: InstrumentSheetRow | null;
}

export interface AssignmentRows {
  /** Live files of every kind. */
  files: StoredFile[];
  scans: StoredScan[];
  instruments: StoredInstrument[];
  sheets: {
    scans: ScanSheetRow[];
    instruments: InstrumentSheetRow[];
    samples: SampleSheetRow[];
    peaks: PeakSheetRow[];
  };
  /** Hash of the rows of peaks.csv that each stored sample was fitted with last. */
  peaksHashes: ReadonlyMap<string, string>;
}

/** Rows of one kind of sheet with the sheets that they stand in: sheets by path, rows in their order; those of one sample, or all. */
export async function loadPlacedRows<T>(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  sheet: ReadSheetName,
  sample?: string,
): Promise<{ path: string; sha256: string; row: T }[]> {
  const ofSample = sample === undefined ? text`` : text`and json_extract(body, '$.sample') = ${sample}`;
  const rows = await allRows<{ path: string; sha256: string; body: string }>(
    ports.database.read,
    text`
      select path, sha256, body from sheet_rows s join files f on f.id = s.file_id
      where s.campaign_id = ${campaignId} and sheet = ${sheet} ${ofSample} order by path, position`,
  );
  return rows.map(({ path, sha256, body }) => ({ path, sha256, row: JSON.parse(body) as T }));
}

/** The same rows alone. */
export const loadSheetRows = async <T>(...of: Parameters<typeof loadPlacedRows>): Promise<T[]> =>
  (await loadPlacedRows<T>(...of)).map(({ row }) => row);

export async function loadAssignment(ports: Ports, campaignId: string): Promise<AssignmentRows> {
  const { read } = ports.database;
  return {
    files: await read
      .select({
        id: files.id,
        path: files.path,
        sha256: files.sha256,
        kind: files.kind,
        state: files.state,
        reason: files.reason,
      })
      .from(files)
      .where(and(eq(files.campaignId, campaignId), eq(files.superseded, false))),
    scans: await read
      .select({
        id: scans.id,
        fileId: scans.fileId,
        disposition: scans.disposition,
        sample: scans.sample,
        instrument: scans.instrument,
        role: scans.role,
        segment: scans.segment,
        said: scans.said,
        sheetHash: scans.sheetHash,
        status: scans.status,
      })
      .from(scans)
      .where(eq(scans.campaignId, campaignId)),
    instruments: await read
      .select({ id: instruments.id, instrument: instruments.instrument, sheetRow: instruments.sheetRow })
      .from(instruments)
      .where(eq(instruments.campaignId, campaignId)),
    sheets: {
      scans: await loadSheetRows<ScanSheetRow>(ports, campaignId, 'scans'),
      instruments: await loadSheetRows<InstrumentSheetRow>(ports, campaignId, 'instruments'),
      samples: await loadSheetRows<SampleSheetRow>(ports, campaignId, 'samples'),
      peaks: await loadSheetRows<PeakSheetRow>(ports, campaignId, 'peaks'),
    },
    peaksHashes: new Map(
      (
        await read
          .select({ sample: samples.sample, hash: samples.peaksHash })
          .from(samples)
          .where(eq(samples.campaignId, campaignId))
      ).map(({ sample, hash }) => [sample, hash]),
    ),
  };
}

/** What a scan row holds after an assignment. */
export interface AssignedScan extends ScanPlace {
  said: Partial<ScanSheetRow>;
  sheetRow: ScanSheetRow | null;
  sheetHash: string;
  status: ScanState;
  reason: string | null;
  flags: Flag[];
}

export const insertScan = (campaignId: string, s: AssignedScan): Statement =>
  text`
    insert into scans (id, campaign_id, file_id, disposition, sample, instrument, role, segment, said, sheet_row, sheet_hash,
      status, reason, flags)
    values (${createId('scan')}, ${campaignId}, ${s.fileId}, ${s.disposition}, ${s.sample}, ${s.instrument}, ${s.role}, ${s.segment},
      ${json(s.said)}, ${json(s.sheetRow)}, ${s.sheetHash}, ${s.status}, ${s.reason}, ${json(s.flags)})`;

/** Gives a scan its new place; what was reduced from the old one no longer counts. */
export const reassignScan = (scanId: string, s: AssignedScan): Statement =>
  text`
    update scans set file_id = ${s.fileId}, disposition = ${s.disposition}, sample = ${s.sample}, instrument = ${s.instrument},
      role = ${s.role}, segment = ${s.segment}, said = ${json(s.said)}, sheet_row = ${json(s.sheetRow)}, sheet_hash = ${s.sheetHash},
      status = ${s.status}, reason = ${s.reason}, flags = ${json(s.flags)}, reduced_key = null, result = null,
      event_numbers = null, inputs_revision = inputs_revision + 1
    where id = ${scanId}`;

export const deleteScan = (db: LibSQLDatabase, scanId: string): Statement =>
  db.delete(scans).where(eq(scans.id, scanId));

/** Files may have been read, refused or superseded while the assignment was worked out: their scans follow them. */
export const followFiles = (db: LibSQLDatabase, campaignId: string): Statement[] => [
  db.run(sql`
    update scans set status = 'read' where campaign_id = ${campaignId} and status = 'received'
      and file_id in (select id from files where campaign_id = ${campaignId} and state = 'read')`),
  db.run(sql`
    update scans set status = case f.state when 'refused' then 'set_aside' else 'failed' end, reason = f.reason
    from files f where f.id = scans.file_id and scans.campaign_id = ${campaignId}
      and scans.status in ('received', 'unassigned') and f.state in ('refused', 'failed')`),
  db.run(sql`
    update scans set status = 'superseded' where campaign_id = ${campaignId} and status <> 'superseded'
      and file_id in (select id from files where campaign_id = ${campaignId} and superseded = 1)`),
];

/** Keeps what the rows of peaks.csv say of each sample, for the next comparison. */
export const savePeaksHashes = (
  db: LibSQLDatabase,
  campaignId: string,
  hashes: readonly (readonly [sample: string, hash: string])[],
): Statement[] =>
  hashes.map(([sample, peaksHash]) =>
    db
      .update(samples)
      .set({ peaksHash })
      .where(and(eq(samples.campaignId, campaignId), eq(samples.sample, sample))),
  );

/** Makes the rows of samples that scans or peaks name, touches those whose scans changed, removes those that nobody names any more with their results. */
export function settleSamples(
  db: LibSQLDatabase,
  campaignId: string,
  named: readonly string[],
  changed: readonly string[],
): Statement[] {
  const statements: Statement[] = [];
  if (named.length > 0) {
    statements.push(
      db
        .insert(samples)
        .values(named.map((sample) => ({ id: createId('sample'), campaignId, sample, state: 'waiting' as const })))
        .onConflictDoNothing(),
    );
  }
  if (changed.length > 0) {
    statements.push(
      touchSamples(
        campaignId,
        sql.join(
          changed.map((name) => sql`${name}`),
          sql`, `,
        ),
      ),
    );
  }
  statements.push(
    db.run(sql`
      delete from samples where campaign_id = ${campaignId} and not exists (
        select 1 from scans s where s.campaign_id = ${campaignId} and s.sample = samples.sample and s.role = 'sample'
          and s.disposition = 'assigned' and s.status <> 'superseded')
        and not exists (
          select 1 from sheet_rows p where p.campaign_id = ${campaignId} and p.sheet = 'peaks'
            and json_extract(p.body, '$.sample') = samples.sample)`),
    ...['parameters', 'verdicts', 'forecasts', 'advice'].map((table) =>
      db.run(sql`
        delete from ${sql.raw(table)} where campaign_id = ${campaignId}
          and sample not in (select sample from samples where campaign_id = ${campaignId})`),
    ),
    ...['fit:', 'judge:', 'forecast:'].map((source) =>
      db.run(sql`
        delete from flags where campaign_id = ${campaignId} and source like ${`${source}%`}
          and substr(source, ${source.length + 1}) not in (select sample from samples where campaign_id = ${campaignId})`),
    ),
  );
  return statements;
}

export interface InstrumentChanges {
  insert: { instrument: string; sheetRow: InstrumentSheetRow | null }[];
  /** Another sheet row, or another set of scans where those decide the kind. */
  update: { id: string; sheetRow: InstrumentSheetRow | null }[];
  remove: string[];
}

export function settleInstruments(db: LibSQLDatabase, campaignId: string, changes: InstrumentChanges): Statement[] {
  return [
    ...changes.insert.map((row) =>
      db
        .insert(instruments)
        .values({ id: createId('instrument'), campaignId, ...row })
        .onConflictDoNothing(),
    ),
    ...changes.update.map(({ id, sheetRow }) =>
      db.update(instruments).set({ sheetRow, inputsRevision: sql`inputs_revision + 1` }).where(eq(instruments.id, id)),
    ),
    ...changes.remove.map((id) => db.delete(instruments).where(eq(instruments.id, id))),
    db.run(sql`
      delete from flags where campaign_id = ${campaignId} and source like 'calibrate:%'
        and substr(source, 11) not in (select instrument from instruments where campaign_id = ${campaignId})`),
  ];
}

/** Replaces the flags that one source wrote. */
export function replaceFlags(
  db: LibSQLDatabase,
  campaignId: string,
  source: string,
  found: readonly Flag[],
): Statement[] {
  const statements: Statement[] = [
    db.delete(flags).where(and(eq(flags.campaignId, campaignId), eq(flags.source, source))),
  ];
  // Long lists go in parts: a statement takes a limited number of values.
  for (let at = 0; at < found.length; at += 500) {
    const part = found.slice(at, at + 500);
    statements.push(db.insert(flags).values(part.map((body, i) => ({ campaignId, source, position: at + i, body }))));
  }
  return statements;
}
