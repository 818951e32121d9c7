/** What a path in a campaign says. */
import { quote } from '../../schema/wire/flags.ts';

const PATH_LIMIT_BYTES = 512;

export type SheetKind = 'scans' | 'instruments' | 'samples' | 'peaks' | 'viscosity' | 'goal';
const SHEET_NAME = /^(scans|instruments|samples|peaks|viscosity|goal)\.csv$/i;

/** Sheets stand at the root of the campaign and are known by their name. */
export function sheetKind(path: string): SheetKind | undefined {
  return SHEET_NAME.exec(path)?.[1].toLowerCase() as SheetKind | undefined;
}

/** A temperature programme: `programs/*.csv`. */
export function isProgram(path: string): boolean {
  return /^programs\/[^/]+\.csv$/i.test(path);
}

export type ArchiveKind = 'zip' | 'gzip';

export function archiveKind(path: string): ArchiveKind | undefined {
  if (/[^/]\.zip$/i.test(path)) return 'zip';
  return /[^/]\.gz$/i.test(path) ? 'gzip' : undefined;
}

/** `x.txt.gz` is `x.txt`. */
export function unpackedPath(path: string): string {
  return archiveKind(path) === 'gzip' ? path.slice(0, -'.gz'.length) : path;
}

/** What is wrong with a path, in words that end a sentence starting with the path; undefined = nothing. */
export function pathProblem(path: string): string | undefined {
  if (path === '') return 'is empty';
  if (/\p{Surrogate}/u.test(path)) return 'holds half a character (a lone surrogate)';
  // Bytes are counted only for paths short enough to be worth it.
  const bytes = path.length > PATH_LIMIT_BYTES ? path.length : new TextEncoder().encode(path).length;
  if (bytes > PATH_LIMIT_BYTES) return `is longer than ${PATH_LIMIT_BYTES} bytes`;
  if (/\p{Cc}/u.test(path)) return 'holds a control character';
  if (path.includes('\\')) return 'holds a backslash; folders are parted by /';
  if (path.startsWith('/')) return 'starts with /; a path is relative to the campaign';
  if (path.normalize('NFC') !== path) return 'is not in Unicode form NFC';
  for (const part of path.split('/')) {
    if (part === '') return 'has an empty part (// or / at the end)';
    if (part === '.' || part === '..') return `has a part ${quote(part)}`;
    if (/^[=+\-@]/.test(part)) return `has a part that starts with ${part[0]}: ${quote(part)}`;
  }
  return undefined;
}

/**
 * Sample and instrument by the folder layout `SAMPLE/INSTRUMENT/file`. An archive counts as the folder it stands in:
 * `archive.zip/SAMPLE/INSTRUMENT/file` and `SAMPLE/INSTRUMENT/archive.zip/file` say the same.
 */
export function assignmentFromPath(path: string): { sample: string; instrument: string } | undefined {
  const parts = path.split('/');
  const folders = parts.slice(0, -1).filter((part) => archiveKind(part) !== 'zip');
  return folders.length === 2 ? { sample: folders[0], instrument: folders[1] } : undefined;
}
