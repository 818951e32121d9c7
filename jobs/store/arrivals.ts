import { and, eq, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { campaigns, type FileKind, files, scans, sheetRows } from '../../schema/tables/index.ts';
import type { ScanSheetRow } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { isConstraint, runBatch, type Statement } from './fence.ts';
import { createId } from './ids.ts';
import { ASSIGN_DELAY_MS, insertJob, touchCampaign } from './job-rows.ts';
import { StoreRefusal } from './refusals.ts';
import { allRows, text } from './statement.ts';

export interface FileReceipt {
  /** The path as sent. */
  file: string;
  outcome: 'accepted' | 'known' | 'replaced' | 'sheet' | 'archive' | 'refused';
  scan_ids?: string[];
  job_id?: string;
  reason?: string;
  /** The other name of one path (`x.txt` and `x.txt.gz`) under which it came before: unless the bytes are the same, that no longer counts. */
  replaces?: string;
}

/** A file whose bytes are in the blob store (or in `bytes`, not stored yet). */
export interface ArrivedFile {
  path: string;
  kind: FileKind;
  sha256: string;
  size: number;
  blobKey: string;
  bytes?: Uint8Array;
  /** The archive it came out of. */
  archiveId?: string;
}

/**
 * Decides what a file is to its campaign, stores its bytes where they are not stored yet, and writes its rows and job in one
 * batch. Throws StoreRefusal `campaign-unknown`.
 */
export async function acceptFile(ports: Ports, campaignId: string, file: ArrivedFile): Promise<FileReceipt> {
  // A second sender may insert the same path in between: the unique index says so, and the second look finds its row.
  for (let tries = 1; ; tries++) {
    const before = await lookAround(ports, campaignId, file);
    if (before.live?.sha256 === file.sha256) {
      if (!file.bytes) await ports.blobs.delete(file.blobKey);
      return { file: file.path, outcome: 'known', scan_ids: await scanIdsOf(ports, before.live.id) };
    }
    const plan = planArrival(campaignId, file, before, ports.clock.now());
    if (file.bytes && !plan.sharedBlob) await ports.blobs.put(file.blobKey, file.bytes, file.size);
    let assignQueued = false;
    try {
      const results = await ports.database.write((db) => runBatch(db, plan.statements(db)));
      // The last but one statement of a data file's batch; it does nothing where an assignment waits already.
      assignQueued = file.kind === 'data' && results.at(-2)?.rowsAffected === 1;
    } catch (error) {
      if (!isConstraint(error)) throw error;
      await requireCampaign(ports, campaignId, file.blobKey);
      if (tries >= 5) throw error;
      continue;
    }
    if (plan.sharedBlob && !file.bytes) await ports.blobs.delete(file.blobKey);
    for (const jobId of plan.jobIds) await ports.queue.wake(jobId, 0);
    if (assignQueued) await ports.queue.wake(plan.assignId, ASSIGN_DELAY_MS / 1000);
    const known = before.live === undefined && (await isKnownScan(ports, campaignId, file, before.sameBytes));
    return {
      file: file.path,
      outcome: outcomeOf(file.kind, before.live !== undefined, known !== false),
      scan_ids: known === false ? plan.scanIds : known,
      ...(plan.jobIds.length > 0 && { job_id: plan.jobIds[0] }),
      ...(before.otherName && { replaces: before.otherName.name }),
    };
  }
}

/** Throws StoreRefusal `campaign-unknown`, after taking the bytes back, where there is no such campaign. */
async function requireCampaign(ports: Ports, campaignId: string, blobKey: string): Promise<void> {
  const found = await ports.database.read
    .select({ id: campaigns.id })
    .from(campaigns)
    .where(eq(campaigns.id, campaignId));
  if (found.length > 0) return;
  await ports.blobs.delete(blobKey);
  throw new StoreRefusal('campaign-unknown', `there is no campaign ${campaignId}`);
}

const outcomeOf = (kind: FileKind, replaces: boolean, known: boolean): FileReceipt['outcome'] => {
  if (replaces) return 'replaced';
  if (known) return 'known';
  return kind === 'data' ? 'accepted' : kind;
};

export interface Surroundings {
  /** The file that has this path now. */
  live?: { id: string; sha256: string; blobKey: string };
  /** An older file of the same path and bytes. */
  former?: { id: string };
  /** The path came under another name before: as `x.txt.gz`, whose row is `archiveId`, or as `x.txt`. */
  otherName?: { name: string; archiveId?: string };
  /** Another path with the same bytes. */
  sameBytes?: { id: string; path: string; blobKey: string };
}

export async function lookAround(ports: Ports, campaignId: string, file: ArrivedFile): Promise<Surroundings> {
  // The campaign stands in both branches: each then has its index, else all files of the campaign are looked at.
  const rows = await allRows<NearbyRow>(
    ports.database.read,
    text`
      select id, path, sha256, blob_key as blobKey, superseded, kind, state, archive_id as archiveId,
        (select path from files a where a.id = f.archive_id) as archivePath
      from files f
      where campaign_id = ${campaignId} and superseded = 0
          and path in (${file.path}, ${ports.paths.unpacked(file.path)}, ${`${file.path}.gz`})
        or campaign_id = ${campaignId} and sha256 = ${file.sha256}`,
  );
  const here = rows.filter((row) => row.path === file.path);
  const elsewhere = rows.filter((row) => row.path !== file.path && row.sha256 === file.sha256 && !row.superseded);
  elsewhere.sort((a, b) => (a.path < b.path ? -1 : 1));
  return {
    live: here.find((row) => !row.superseded),
    former: here.find((row) => row.superseded && row.sha256 === file.sha256),
    otherName: file.archiveId === undefined ? otherNameOf(ports, file, rows) : undefined,
    sameBytes: elsewhere[0],
  };
}

interface NearbyRow {
  id: string;
  path: string;
  sha256: string;
  blobKey: string;
  superseded: 0 | 1;
  kind: FileKind;
  state: string;
  archiveId: string | null;
  archivePath: string | null;
}

function otherNameOf(ports: Ports, file: ArrivedFile, rows: readonly NearbyRow[]): Surroundings['otherName'] {
  const live = rows.filter((row) => !row.superseded);
  const plain = ports.paths.unpacked(file.path);
  const here = live.find((row) => row.path === plain);
  if (file.path !== plain) {
    const name = here && (here.archivePath ?? here.path);
    return name === undefined || name === file.path ? undefined : { name };
  }
  if (here?.archivePath && ports.paths.unpacked(here.archivePath) === plain)
    return { name: here.archivePath, archiveId: here.archiveId ?? undefined };
  // Not unpacked yet: what came later counts all the same.
  const packed = live.find((row) => row.path !== plain && ports.paths.unpacked(row.path) === plain);
  return packed?.state === 'unread' ? { name: packed.path, archiveId: packed.id } : undefined;
}

export interface ArrivalPlan {
  statements(db: LibSQLDatabase): Statement[];
  jobIds: string[];
  assignId: string;
  scanIds: string[];
  /** The bytes are in the store already under another row's key. */
  sharedBlob: boolean;
}

/** The rows and jobs that an arriving file makes. */
export function planArrival(campaignId: string, file: ArrivedFile, before: Surroundings, now: number): ArrivalPlan {
  const { live, former, sameBytes, otherName } = before;
  const assignId = createId('job');
  const jobId = createId('job');
  // Members of an archive are woken by its write-back.
  const woken = file.archiveId === undefined;
  const common = (): Statement[] => [
    insertJob({
      id: assignId,
      campaignId,
      step: 'assign-scans',
      subject: campaignId,
      now,
      delayMs: ASSIGN_DELAY_MS,
      woken,
    }),
    touchCampaign(campaignId, true),
  ];
  // The packed file goes with what came out of it: sent again, it is no longer known.
  const supersede = (db: LibSQLDatabase): Statement[] =>
    [live?.id, otherName?.archiveId].flatMap((id) => (id === undefined ? [] : supersedeFile(db, id)));
  if (former && file.kind === 'data') {
    // The path has its old bytes back: the old row, its columns and results count again.
    return {
      statements: (db) => [
        ...supersede(db),
        db
          .update(files)
          .set({ superseded: false, archiveId: file.archiveId ?? null })
          .where(eq(files.id, former.id)),
        // It may have been superseded before it was read.
        insertJob({ id: jobId, campaignId, step: 'read-scan', subject: former.id, now, woken }),
        ...common(),
      ],
      jobIds: [jobId],
      assignId,
      scanIds: [],
      sharedBlob: true,
    };
  }
  const fileId = createId('file');
  const scanId = createId('scan');
  const step = ({ data: 'read-scan', sheet: 'read-sheet', archive: 'unpack-archive' } as const)[file.kind];
  return {
    statements: (db) => [
      ...supersede(db),
      text`
        insert into files (id, campaign_id, path, sha256, bytes, blob_key, kind, archive_id, state, created_at)
        values (${fileId}, ${campaignId}, ${file.path}, ${file.sha256}, ${file.size}, ${sameBytes?.blobKey ?? file.blobKey},
          ${file.kind}, ${file.archiveId}, 'unread', ${now})`,
      ...(file.kind === 'data'
        ? [
            text`
              insert into scans (id, campaign_id, file_id, disposition, status)
              values (${scanId}, ${campaignId}, ${fileId}, 'waiting', 'received')`,
          ]
        : []),
      insertJob({ id: jobId, campaignId, step, subject: fileId, now, woken }),
      // A sheet or an archive queues the assignment itself once it is read.
      ...(file.kind === 'data' ? common() : [touchCampaign(campaignId, true)]),
    ],
    jobIds: [jobId],
    assignId,
    scanIds: file.kind === 'data' ? [scanId] : [],
    sharedBlob: sameBytes !== undefined,
  };
}

/** Takes a file out of what counts; its original and its scans stay, marked superseded. */
export function supersedeFile(db: LibSQLDatabase, fileId: string): Statement[] {
  return [
    db.update(files).set({ superseded: true }).where(eq(files.id, fileId)),
    db
      .update(scans)
      .set({ status: 'superseded', inputsRevision: sql`inputs_revision + 1` })
      .where(eq(scans.fileId, fileId)),
    db.run(sql`
      update samples set inputs_revision = inputs_revision + 1, state = 'stale'
      where (campaign_id, sample) in (select campaign_id, sample from scans where file_id = ${fileId} and role = 'sample')`),
    db.run(sql`
      update instruments set inputs_revision = inputs_revision + 1
      where (campaign_id, instrument) in (
        select campaign_id, instrument from scans where file_id = ${fileId} and role = 'standard' and disposition = 'assigned')`),
  ];
}

const scanIdsOf = async (ports: Ports, fileId: string): Promise<string[]> =>
  (await ports.database.read.select({ id: scans.id }).from(scans).where(eq(scans.fileId, fileId))).map((row) => row.id);

/** Whether bytes under a new path are told at once to be a scan that is here: its ids, or false. The assignment decides for good. */
async function isKnownScan(
  ports: Ports,
  campaignId: string,
  file: ArrivedFile,
  other: Surroundings['sameBytes'],
): Promise<string[] | false> {
  if (file.kind !== 'data' || !other) return false;
  const rows = await ports.database.read
    .select({ body: sheetRows.body })
    .from(sheetRows)
    .where(and(eq(sheetRows.campaignId, campaignId), eq(sheetRows.sheet, 'scans')));
  const base = (path: string) => path.slice(path.lastIndexOf('/') + 1);
  const known =
    rows.length > 0
      ? !rows.some(({ body }) => {
          const named = (body as ScanSheetRow).file;
          return named === file.path || (named === base(file.path) && base(other.path) !== named);
        })
      : JSON.stringify(ports.paths.assignment(file.path)) === JSON.stringify(ports.paths.assignment(other.path));
  return known ? scanIdsOf(ports, other.id) : false;
}
