import { and, eq, type SQL } from 'drizzle-orm';
import { type FileKind, files } from '../../schema/tables/index.ts';
import type { Ports } from '../ports/index.ts';

export type FileRow = typeof files.$inferSelect;

/** Files of one kind that count (none that another one replaced), of which `also` holds. */
export const loadLiveFiles = (
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  kind: FileKind,
  also: SQL,
): Promise<FileRow[]> =>
  ports.database.read
    .select()
    .from(files)
    .where(and(eq(files.campaignId, campaignId), eq(files.kind, kind), eq(files.superseded, false), also));
