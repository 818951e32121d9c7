import type { SheetRowBody } from '../../schema/tables/index.ts';
import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import { readInstrumentsSheet, readSamplesSheet, readScansSheet, sheetKind } from '../instrument/index.ts';
import type { Ports } from '../ports/index.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { loadFile } from '../store/scan-rows.ts';
import { saveSheet } from '../store/sheet-rows.ts';

const READERS: Record<
  'scans' | 'instruments' | 'samples',
  (bytes: Uint8Array, file: string) => { rows: SheetRowBody[]; flags: Flag[] }
> = { scans: readScansSheet, instruments: readInstrumentsSheet, samples: readSamplesSheet };

/** Step `read-sheet`: the rows of a sheet take the place of older ones; what hangs on them is worked out by the assignment. */
export async function readSheetFile(ports: Ports, job: ClaimedJob): Promise<void> {
  const file = await loadFile(ports, job.subject);
  if (!file || file.superseded || file.state !== 'unread') return completeJob(ports, job);
  const name = sheetKind(file.path);
  if (name !== 'scans' && name !== 'instruments' && name !== 'samples') {
    const flags = [
      flag(
        'sheet-unused',
        `${quote(file.path)} is kept and not used: this version has no step that reads it.`,
        'Nothing: its numbers change no result so far.',
        { file: file.path },
      ),
    ];
    return completeJob(ports, job, (db, now) =>
      saveSheet(db, file, now, undefined, { state: 'parsed', reason: null, flags }),
    );
  }
  const { rows, flags } = READERS[name](await ports.blobs.bytes(file.blobKey), file.path);
  const stop = rows.length === 0 ? flags.find((found) => found.severity === 'stop') : undefined;
  await completeJob(ports, job, (db, now) =>
    saveSheet(
      db,
      file,
      now,
      { name, rows },
      {
        state: stop ? 'refused' : 'parsed',
        reason: stop?.detail ?? null,
        flags,
      },
    ),
  );
}
