import type { SheetRowBody } from '../../schema/tables/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { ProgramSheetRow } from '../../schema/wire/forecasts.ts';
import {
  readGoalSheet,
  readInstrumentsSheet,
  readPeaksSheet,
  readProgram,
  readSamplesSheet,
  readScansSheet,
  readViscositySheet,
  type SheetKind,
  sheetKind,
} from '../instrument/index.ts';
import type { Ports } from '../ports/index.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { loadFile } from '../store/scan-rows.ts';
import { saveSheet } from '../store/sheet-rows.ts';

const READERS: Record<
  SheetKind,
  (bytes: Uint8Array, file: string) => { rows: readonly SheetRowBody[]; flags: Flag[] }
> = {
  scans: readScansSheet,
  instruments: readInstrumentsSheet,
  samples: readSamplesSheet,
  peaks: readPeaksSheet,
  viscosity: readViscositySheet,
  goal: readGoalSheet,
};

/** Step `read-sheet`: the rows of a sheet take the place of older ones; what hangs on them is worked out by the assignment. */
export async function readSheetFile(ports: Ports, job: ClaimedJob): Promise<void> {
  const file = await loadFile(ports, job.subject);
  if (!file || file.superseded || file.state !== 'unread') return completeJob(ports, job);
  const bytes = await ports.blobs.bytes(file.blobKey);
  const kind = sheetKind(file.path);
  const { rows, flags } = kind === undefined ? readProgramSheet(bytes, file.path) : READERS[kind](bytes, file.path);
  const stop = rows.length === 0 ? flags.find((found) => found.severity === 'stop') : undefined;
  await completeJob(ports, job, (db, now) =>
    saveSheet(
      db,
      file,
      now,
      { name: kind ?? 'program', rows },
      {
        state: stop ? 'refused' : 'parsed',
        reason: stop?.detail ?? null,
        flags,
      },
    ),
  );
}

/** A programme stays in its file: a row only says that it can be used. */
function readProgramSheet(bytes: Uint8Array, path: string): { rows: ProgramSheetRow[]; flags: Flag[] } {
  const { programme, flags } = readProgram(bytes, path);
  return { rows: programme ? [{ program: path, rows: programme.timeS.length }] : [], flags };
}
