import { and, eq } from 'drizzle-orm';
import { files, sheetRows } from '../../schema/tables/index.ts';
import type { Ports } from '../ports/index.ts';
import { supersedeFile } from './arrivals.ts';
import { runBatch } from './fence.ts';
import { createId } from './ids.ts';
import { insertJob, touchCampaign } from './job-rows.ts';
import { wakeCampaign } from './leases.ts';

/** Marks every live file whose path is not in `paths` superseded, so that results describe a folder as it is now. Returns the paths withdrawn. */
export async function withdrawMissingFiles(
  ports: Ports,
  campaignId: string,
  paths: ReadonlySet<string>,
): Promise<string[]> {
  const rows = await ports.database.read
    .select({ id: files.id, path: files.path, kind: files.kind, archiveId: files.archiveId })
    .from(files)
    .where(and(eq(files.campaignId, campaignId), eq(files.superseded, false)));
  const gone = rows.filter((row) => row.archiveId === null && !paths.has(row.path));
  const goneIds = new Set(gone.map((row) => row.id));
  // Members go with their archive, and an archive within an archive with it.
  for (let found = true; found; ) {
    const more = rows.filter((row) => row.archiveId !== null && goneIds.has(row.archiveId) && !goneIds.has(row.id));
    for (const row of more) goneIds.add(row.id);
    gone.push(...more);
    found = more.length > 0;
  }
  if (gone.length === 0) return [];
  const now = ports.clock.now();
  await ports.database.write((db) =>
    runBatch(db, [
      ...gone.flatMap((row) => supersedeFile(db, row.id)),
      ...gone.map((row) => db.delete(sheetRows).where(eq(sheetRows.fileId, row.id))),
      insertJob({ id: createId('job'), campaignId, step: 'assign-scans', subject: campaignId, now }),
      touchCampaign(campaignId, true),
    ]),
  );
  await wakeCampaign(ports, campaignId);
  return gone.map((row) => row.path).sort();
}
