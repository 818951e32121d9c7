/** From the bytes of instrument files, sheets and archives to columns and rows in SI. */

export { type ArchiveMember, unpackArchive } from './archive.ts';
export { readGoalSheet, readPeaksSheet, readProgram, readViscositySheet } from './further-sheets.ts';
export { ARCHIVE_LIMITS, ArchiveRefused, type UnpackLimits } from './inflate.ts';
export {
  type ArchiveKind,
  archiveKind,
  assignmentFromPath,
  isProgram,
  pathProblem,
  type SheetKind,
  sheetKind,
  unpackedPath,
} from './paths.ts';
export { createScanReader, readScan, type ScanReader } from './scan-reader.ts';
export { readInstrumentsSheet, readSamplesSheet, readScansSheet, type SheetRows } from './sheets.ts';
