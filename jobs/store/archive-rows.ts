import { and, eq, inArray, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, sheetRows } from '../../schema/tables/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { Ports } from '../ports/index.ts';
import { type ArrivalPlan, type ArrivedFile, lookAround, planArrival, supersedeFile } from './arrivals.ts';
import type { Statement } from './fence.ts';
import { createId } from './ids.ts';
import { insertJob } from './job-rows.ts';
import type { FileRow } from './scan-rows.ts';

/** A member as its archive's write-back will store it. */
export interface PlacedMember {
  path: string;
  /** The row that has this path and these bytes already. */
  keptId?: string;
  plan?: ArrivalPlan;
}

/** Looks where a member belongs and stores its bytes where they are new. Under a key of archive and position, so that a second attempt leaves no second blob. */
export async function placeMember(
  ports: Ports,
  archive: FileRow,
  position: number,
  member: ArrivedFile,
): Promise<PlacedMember> {
  const file = {
    ...member,
    archiveId: archive.id,
    blobKey: `originals/${archive.campaignId}/${archive.id}-${position}`,
  };
  const before = await lookAround(ports, archive.campaignId, file);
  if (before.live?.sha256 === file.sha256) return { path: file.path, keptId: before.live.id };
  const plan = planArrival(archive.campaignId, file, before, ports.clock.now());
  if (!plan.sharedBlob) await ports.blobs.put(file.blobKey, file.bytes as Uint8Array, file.size);
  return { path: file.path, plan };
}

/** Live members of older archives under the same path that the new one holds no more. */
export async function findDroppedMembers(ports: Ports, archive: FileRow, kept: ReadonlySet<string>): Promise<string[]> {
  const older = ports.database.read
    .select({ id: files.id })
    .from(files)
    .where(and(eq(files.campaignId, archive.campaignId), eq(files.path, archive.path), eq(files.superseded, true)));
  const rows = await ports.database.read
    .select({ id: files.id, path: files.path })
    .from(files)
    .where(and(inArray(files.archiveId, older), eq(files.superseded, false)));
  return rows.filter((row) => !kept.has(row.path)).map((row) => row.id);
}

/** All members of an archive, or none. */
export function saveUnpacked(
  db: LibSQLDatabase,
  archive: FileRow,
  now: number,
  members: readonly PlacedMember[],
  droppedIds: readonly string[],
  found: { state: 'expanded' | 'refused'; reason: string | null; flags: Flag[] },
): Statement[] {
  const keptIds = members.flatMap((member) => member.keptId ?? []);
  return [
    db.update(files).set(found).where(eq(files.id, archive.id)),
    ...droppedIds.flatMap((id) => [...supersedeFile(db, id), db.delete(sheetRows).where(eq(sheetRows.fileId, id))]),
    ...members.flatMap((member) => member.plan?.statements(db) ?? []),
    ...keptIds.map((id) =>
      db
        .update(files)
        .set({ archiveId: archive.id })
        .where(and(eq(files.id, id), sql`archive_id is not null`)),
    ),
    insertJob({
      id: createId('job'),
      campaignId: archive.campaignId,
      step: 'assign-scans',
      subject: archive.campaignId,
      now,
    }),
  ];
}
