import { readFile } from 'node:fs/promises';
import { basename } from 'node:path';
import type { Flag } from '../../schema/wire/flags.ts';
import type { ReadScan, ScanSheetRow } from '../../schema/wire/scan.ts';
import {
  ARCHIVE_LIMITS,
  ArchiveRefused,
  archiveKind,
  assignmentFromPath,
  isProgram,
  pathProblem,
  readGoalSheet,
  readInstrumentsSheet,
  readPeaksSheet,
  readProgram,
  readSamplesSheet,
  readScan,
  readScansSheet,
  readViscositySheet,
  sheetKind,
  unpackArchive,
} from '../instrument/index.ts';
import type { CampaignFolder } from './campaign-folder.ts';
import type { Terminal } from './terminal.ts';
import { shortNumber } from './text-table.ts';

/** How one file would be understood. */
interface FileReading {
  file: string;
  kind: 'scan' | 'sheet' | 'programme' | 'archive' | 'set aside';
  sample?: string;
  instrument?: string;
  /** Where sample and instrument come from */
  assigned?: 'sheet' | 'folder' | 'nothing';
  rows?: number;
  dialect?: string;
  columns?: ReadScan['columns'];
  exotherm?: string;
  nominalRateKPerS?: number;
  reason?: string;
  action?: string;
  flags: Flag[];
}

const SHEET_READERS = {
  scans: readScansSheet,
  instruments: readInstrumentsSheet,
  samples: readSamplesSheet,
  peaks: readPeaksSheet,
  viscosity: readViscositySheet,
  goal: readGoalSheet,
} as const;

/** `run --dry`: reads every file and says how it and its columns are understood; computes and writes nothing. */
export async function describeFolder(
  { files, skipped }: CampaignFolder,
  json: boolean,
  terminal: Terminal,
): Promise<void> {
  const readings: FileReading[] = [];
  let sheetRows: ScanSheetRow[] = [];
  for (const { path, location } of files) {
    terminal.interrupt.throwIfAborted();
    const bytes = await readFile(location);
    if (path.toLowerCase() === 'scans.csv') sheetRows = readScansSheet(bytes, path).rows;
    if (archiveKind(path) === undefined) readings.push(describeFile(path, bytes, sheetRows));
    else readings.push(...describeArchive(path, bytes, sheetRows));
  }
  const present = new Set(readings.flatMap((r) => [r.file, basename(r.file)]));
  const missing = sheetRows.filter((row) => !present.has(row.file)).map((row) => ({ file: row.file, line: row.line }));
  if (json) {
    terminal.out(`${JSON.stringify({ files: readings, missing, skipped }, null, 2)}\n`);
    return;
  }
  for (const reading of readings) terminal.out(readingText(reading));
  for (const { file, line } of missing) terminal.out(`${file}\n  named by scans.csv line ${line}, not in the folder\n`);
  for (const sentence of skipped) terminal.out(`not read: ${sentence}\n`);
  const count = (kind: FileReading['kind']): number => readings.filter((r) => r.kind === kind).length;
  terminal.out(
    `${count('scan')} scans, ${count('sheet')} sheets, ${count('set aside')} files set aside; nothing was computed or written\n`,
  );
}

function describeArchive(path: string, bytes: Uint8Array, sheetRows: readonly ScanSheetRow[]): FileReading[] {
  const readings: FileReading[] = [];
  const flags: Flag[] = [];
  try {
    for (const member of unpackArchive(bytes, path, ARCHIVE_LIMITS, (flag) => flags.push(flag))) {
      readings.push(describeFile(member.path, member.bytes, sheetRows));
    }
  } catch (error) {
    if (!(error instanceof ArchiveRefused)) throw error;
    readings.push({ file: path, kind: 'set aside', reason: error.message, action: error.action, flags: [] });
  }
  if (flags.length > 0) readings.push({ file: path, kind: 'archive', flags });
  return readings;
}

function describeFile(file: string, bytes: Uint8Array, sheetRows: readonly ScanSheetRow[]): FileReading {
  const problem = pathProblem(file);
  if (problem) return { file, kind: 'set aside', reason: `the path ${problem}`, flags: [] };
  const sheet = sheetKind(file);
  if (sheet) {
    const { rows, flags } = SHEET_READERS[sheet](bytes, file);
    return { file, kind: 'sheet', rows: rows.length, flags };
  }
  if (isProgram(file)) {
    const { programme, flags } = readProgram(bytes, file);
    return { file, kind: 'programme', rows: programme?.timeS.length ?? 0, flags };
  }
  const assignment = assign(file, sheetRows);
  const outcome = readScan(bytes, file);
  if (!outcome.ok) {
    const { reason, action } = outcome.refusal;
    return { file, kind: 'set aside', ...assignment, reason, action, flags: [] };
  }
  const { scan } = outcome;
  return {
    file,
    kind: 'scan',
    ...assignment,
    exotherm: assignment.exotherm ?? scan.exotherm,
    rows: scan.timeS.length,
    dialect: scan.dialect,
    columns: scan.columns,
    flags: scan.flags,
  };
}

/** Sample and instrument: the sheet's row for the path or its unique base name, else the folders. */
function assign(file: string, rows: readonly ScanSheetRow[]) {
  const byPath = rows.filter((row) => row.file === file);
  const found = byPath.length > 0 ? byPath : rows.filter((row) => row.file === basename(file));
  const row = found.at(0);
  if (row) {
    const { sample, instrument, exotherm, rateKPerS } = row;
    return { sample, instrument, assigned: 'sheet', exotherm, nominalRateKPerS: rateKPerS } as const;
  }
  const folders = assignmentFromPath(file);
  return { ...folders, assigned: folders ? 'folder' : 'nothing', exotherm: undefined } as const;
}

function readingText(reading: FileReading): string {
  const lines = [reading.file];
  const { kind, sample, instrument, assigned, rows } = reading;
  if (kind === 'sheet' || kind === 'programme') lines.push(`${kind}${rows === undefined ? '' : `, ${rows} rows`}`);
  if (assigned === 'nothing')
    lines.push('no sheet row and no SAMPLE/INSTRUMENT folders name it: it would stay unassigned');
  else if (assigned) lines.push(`sample ${sample}, instrument ${instrument} (by ${assigned})`);
  if (kind === 'scan') {
    lines.push(`${reading.dialect}; ${rows} rows`);
    lines.push(reading.columns!.map((c) => `${c.quantity} [${c.unit}] from «${c.header}»`).join(', '));
    const rate = reading.nominalRateKPerS;
    lines.push(
      `exotherm ${reading.exotherm ?? 'stated nowhere: worked out from the curve'}; nominal rate ${rate === undefined ? 'not stated' : `${shortNumber(rate)} K/s`}`,
    );
  }
  if (reading.reason) lines.push(`set aside: ${reading.reason}`);
  if (reading.action) lines.push(`to do: ${reading.action}`);
  for (const flag of reading.flags) lines.push(`${flag.code}: ${flag.detail}`);
  return `${lines.join('\n  ')}\n`;
}
