import { eq, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, type ReadSheetName, type SheetRowBody, sheetRows } from '../../schema/tables/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { Statement } from './fence.ts';
import { createId } from './ids.ts';
import { insertJob } from './job-rows.ts';
import type { FileRow } from './scan-rows.ts';

const ROWS_A_STATEMENT = 1_000;

/** Puts the rows of a sheet in the place of those that older sheets under the same path left, and has the scans assigned anew. */
export function saveSheet(
  db: LibSQLDatabase,
  file: FileRow,
  now: number,
  sheet: { name: ReadSheetName; rows: readonly SheetRowBody[] },
  read: { state: 'parsed' | 'refused'; reason: string | null; flags: Flag[] },
): Statement[] {
  const { campaignId, path } = file;
  const statements: Statement[] = [
    db.run(sql`
      delete from sheet_rows where file_id in (select id from files where campaign_id = ${campaignId} and path = ${path})`),
    db.update(files).set(read).where(eq(files.id, file.id)),
  ];
  const { name, rows } = sheet;
  for (let at = 0; at < rows.length; at += ROWS_A_STATEMENT) {
    const part = rows.slice(at, at + ROWS_A_STATEMENT);
    statements.push(
      db.insert(sheetRows).values(
        part.map((body, i) => ({
          campaignId,
          fileId: file.id,
          sheet: name,
          position: at + i,
          body,
        })),
      ),
    );
  }
  return [
    ...statements,
    insertJob({ id: createId('job'), campaignId, step: 'assign-scans', subject: campaignId, now }),
  ];
}
