import { type Flag, flag } from '../../schema/wire/flags.ts';
import { ARCHIVE_LIMITS, ArchiveRefused, unpackArchive } from '../instrument/index.ts';
import type { Ports } from '../ports/index.ts';
import { findDroppedMembers, type PlacedMember, placeMember, saveUnpacked } from '../store/archive-rows.ts';
import { sha256Hex } from '../store/ids.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { type FileRow, loadFile } from '../store/scan-rows.ts';

/** Step `unpack-archive`: every member becomes a file of the campaign, all of them in one batch. */
export async function unpackArchiveFile(ports: Ports, job: ClaimedJob): Promise<void> {
  const archive = await loadFile(ports, job.subject);
  if (!archive || archive.superseded || archive.state !== 'unread') return completeJob(ports, job);
  const flags: Flag[] = [];
  let members: PlacedMember[] = [];
  let reason: string | null = null;
  try {
    members = await placeMembers(ports, archive, flags);
    if (members.length === 0)
      throw new ArchiveRefused(`${archive.path} holds no file that can be used`, 'Check what the archive holds.');
  } catch (error) {
    if (!(error instanceof ArchiveRefused)) throw error;
    members = [];
    reason = error.message;
    flags.push(flag('file-damaged', error.message, error.action, { file: archive.path }));
  }
  const state = reason === null ? 'expanded' : 'refused';
  const dropped = await findDroppedMembers(ports, archive, new Set(members.map((member) => member.path)));
  await completeJob(ports, job, (db, now) =>
    saveUnpacked(db, archive, now, members, dropped, { state, reason, flags }),
  );
}

async function placeMembers(ports: Ports, archive: FileRow, flags: Flag[]): Promise<PlacedMember[]> {
  const members: PlacedMember[] = [];
  const bytes = await ports.blobs.bytes(archive.blobKey);
  for (const { path, bytes: content } of unpackArchive(bytes, archive.path, ARCHIVE_LIMITS, (found) =>
    flags.push(found),
  )) {
    const arrived = {
      path,
      kind: ports.paths.kind(path),
      sha256: sha256Hex(content),
      size: content.byteLength,
      blobKey: '',
      bytes: content,
    };
    members.push(await placeMember(ports, archive, members.length, arrived));
  }
  return members;
}
