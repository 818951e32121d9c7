/** Unpacking zip and gzip files into members that are read like files of their own. */
import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import { gunzipLimited } from './gzip.ts';
import {
  ARCHIVE_LIMITS,
  ArchiveRefused,
  type Budget,
  crc32,
  createBudget,
  inflateLimited,
  type UnpackLimits,
} from './inflate.ts';
import { archiveKind, pathProblem, unpackedPath } from './paths.ts';
import { packedBytesOf, readZipDirectory, type ZipEntry } from './zip-directory.ts';

export interface ArchiveMember {
  /** `archive.zip/inner/path`, or the gzip file's path without `.gz` */
  path: string;
  bytes: Uint8Array;
}

/** Left by operating systems when folders are packed. */
const DROPPINGS = /(^|\/)(__MACOSX\/|\.DS_Store$|Thumbs\.db$|desktop\.ini$|\._[^/]*$)/i;
const METHOD_STORED = 0;
const METHOD_DEFLATED = 8;

/**
 * Members of an archive, one at a time, so that only one is held unpacked. A gzip member of a zip is unpacked too; a zip in a zip is not.
 * What is wrong with one member goes to `report` as a flag (`file-damaged`, or the note `archive-member-skipped`) and the others go on.
 * Throws ArchiveRefused when the archive cannot be unpacked at all or passes a limit, the latter before or while it inflates.
 */
export function unpackArchive(
  bytes: Uint8Array,
  path: string,
  limits: UnpackLimits = ARCHIVE_LIMITS,
  report: (flag: Flag) => void = () => {},
): Iterable<ArchiveMember> {
  return archiveKind(path) === 'zip' ? unpackZip(bytes, path, limits, report) : unpackGzip(bytes, path, limits);
}

function* unpackGzip(bytes: Uint8Array, path: string, limits: UnpackLimits): Generator<ArchiveMember> {
  const inner = unpackedPath(path);
  if (archiveKind(inner) !== undefined || /\.tar$/i.test(inner))
    throw new ArchiveRefused(
      `${path} is an archive inside gzip`,
      'Pack the files themselves into one zip, or each into a gzip file.',
    );
  try {
    yield { path: inner, bytes: gunzipLimited(bytes, createBudget(path, limits)) };
  } catch (error) {
    throw refusalOf(error, path);
  }
}

function* unpackZip(
  bytes: Uint8Array,
  path: string,
  limits: UnpackLimits,
  report: (flag: Flag) => void,
): Generator<ArchiveMember> {
  let entries: ZipEntry[];
  const budget = createBudget(path, limits);
  try {
    entries = readZipDirectory(bytes);
    // Stated sizes are checked before anything is inflated, and each member is held to its own afterwards.
    budget.check(
      entries.reduce((sum, entry) => sum + entry.unpackedBytes, 0),
      bytes.length,
    );
    for (const entry of entries) budget.check(entry.unpackedBytes, entry.packedBytes);
  } catch (error) {
    throw refusalOf(error, path);
  }
  const skipped = entries.filter((entry) => !entry.isDirectory && DROPPINGS.test(entry.name));
  if (skipped.length > 0)
    report(
      flag(
        'archive-member-skipped',
        `${skipped.length} ${skipped.length === 1 ? 'entry' : 'entries'} left by an operating system not unpacked: ${skipped
          .slice(0, 5)
          .map((e) => quote(e.name))
          .join(' ')}`,
        'Nothing to do.',
        { file: path },
      ),
    );
  const seen = new Set<string>();
  for (const entry of entries) {
    if (entry.isDirectory || DROPPINGS.test(entry.name)) continue;
    const memberPath = unpackedPath(`${path}/${entry.name}`);
    const problem = entryProblem(entry, memberPath, seen);
    if (problem !== undefined) {
      report(flag('file-damaged', `${quote(entry.name)} in ${path} ${problem.reason}`, problem.action, { file: path }));
      continue;
    }
    seen.add(memberPath);
    let member: Uint8Array;
    try {
      member = unpackEntry(bytes, entry, budget);
    } catch (error) {
      if (error instanceof ArchiveRefused) throw error;
      const action = 'Pack and send the archive again, or send this file alone.';
      report(
        flag('file-damaged', `${quote(entry.name)} in ${path} cannot be unpacked: ${messageOf(error)}`, action, {
          file: memberPath,
        }),
      );
      continue;
    }
    yield { path: memberPath, bytes: member };
  }
}

function entryProblem(
  entry: ZipEntry,
  memberPath: string,
  seen: Set<string>,
): { reason: string; action: string } | undefined {
  const unsafe = pathProblem(memberPath);
  if (unsafe !== undefined)
    return { reason: `was left out: its path ${unsafe}`, action: 'Rename it and pack the archive again.' };
  if (entry.encrypted) return { reason: 'is encrypted', action: 'Pack the archive again without a password.' };
  if (archiveKind(memberPath) !== undefined)
    return { reason: 'is an archive inside an archive', action: 'Unpack it and send its files, or send it alone.' };
  if (entry.method !== METHOD_STORED && entry.method !== METHOD_DEFLATED)
    return {
      reason: `is packed by method ${entry.method}, which is not read`,
      action: 'Pack the archive again with the usual method, deflate.',
    };
  if (seen.has(memberPath))
    return {
      reason: 'stands in the archive twice; only the first was read',
      action: 'Give the two files different names.',
    };
  return undefined;
}

function unpackEntry(bytes: Uint8Array, entry: ZipEntry, budget: Budget): Uint8Array {
  const packed = packedBytesOf(bytes, entry);
  const member = entry.method === METHOD_STORED ? packed.slice() : inflateLimited(packed, budget, entry.unpackedBytes);
  budget.check(member.length, entry.packedBytes);
  budget.spend(member.length);
  if (member.length !== entry.unpackedBytes)
    throw new Error(
      `it holds ${member.length > entry.unpackedBytes ? 'more' : 'fewer'} bytes than the ${entry.unpackedBytes} the archive states`,
    );
  if (crc32(member) !== entry.crc) throw new Error('its checksum does not agree');
  if (archiveKind(entry.name) !== 'gzip') return member;
  const inner = gunzipLimited(member, budget);
  budget.spend(inner.length);
  return inner;
}

function refusalOf(error: unknown, path: string): ArchiveRefused {
  if (error instanceof ArchiveRefused) return error;
  return new ArchiveRefused(
    `${path} cannot be unpacked: ${messageOf(error)}`,
    'Copy or pack the archive again, or send its files unpacked.',
  );
}

function messageOf(error: unknown): string {
  return error instanceof Error ? error.message : String(error);
}
