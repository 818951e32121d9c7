import { createHash } from 'node:crypto';
import { createReadStream, type Dirent } from 'node:fs';
import { access, readdir, realpath, stat } from 'node:fs/promises';
import { join, resolve } from 'node:path';
import { pipeline } from 'node:stream/promises';
import { sheetKind, unpackedPath } from '../instrument/index.ts';
import { UsageError } from './exit.ts';

export interface FolderFile {
  /** As the campaign knows it: relative, `/`, NFC. */
  path: string;
  /** Where it lies. */
  location: string;
  bytes: number;
}

export interface CampaignFolder {
  /** Sheets first, then by path. */
  files: FolderFile[];
  /** What lies in the folder and is not read, with the reason, one sentence each. */
  skipped: string[];
}

const compare = (a: string, b: string): number => (a < b ? -1 : a > b ? 1 : 0);

/**
 * Lists a campaign folder. Not read, and said so: hidden files and folders (a leading dot), a folder below that holds a
 * run.json (results of a run), linked folders (they could lead in circles), `x.txt.gz` beside `x.txt` (one path to a campaign,
 * where the later one would replace the other at every run), and `except` (the results of this run).
 * Throws UsageError when the folder cannot be read.
 */
export async function listCampaignFolder(folder: string, except: readonly string[] = []): Promise<CampaignFolder> {
  const root = resolve(folder);
  const unread = new Set(await Promise.all(except.map(realPath)));
  const files: FolderFile[] = [];
  const skipped: string[] = [];

  async function visit(location: string, prefix: string): Promise<void> {
    const entries = await readdir(location, { withFileTypes: true }).catch((error: NodeJS.ErrnoException) => {
      throw unreadable(location, error);
    });
    if (prefix !== '' && entries.some((e) => e.name === 'run.json')) {
      skipped.push(`${prefix} holds a run.json and is taken for results`);
      return;
    }
    for (const entry of entries.sort((a, b) => compare(a.name, b.name))) await visitEntry(entry, location, prefix);
  }

  async function visitEntry(entry: Dirent, parent: string, prefix: string): Promise<void> {
    const location = join(parent, entry.name);
    const path = `${prefix}${entry.name.normalize('NFC')}`;
    if (unread.has(await realPath(location))) return;
    if (entry.name.startsWith('.')) {
      skipped.push(`${path} is hidden`);
    } else if (entry.isDirectory()) {
      await visit(location, `${path}/`);
    } else {
      const info = await stat(location).catch(() => undefined);
      if (info?.isFile()) files.push({ path, location, bytes: info.size });
      else skipped.push(`${path} is ${info?.isDirectory() ? 'a linked folder' : 'no regular file'}`);
    }
  }

  await visit(root, '');
  const paths = new Set(files.map(({ path }) => path));
  const single = files.filter(({ path }) => {
    const plain = unpackedPath(path);
    const twice = plain !== path && paths.has(plain);
    if (twice) skipped.push(`${path} unpacks to ${plain}, which is there too and counts`);
    return !twice;
  });
  const first = (file: FolderFile): number => (sheetKind(file.path) ? 0 : 1);
  return { files: single.sort((a, b) => first(a) - first(b) || compare(a.path, b.path)), skipped };
}

function unreadable(location: string, error: NodeJS.ErrnoException): UsageError {
  const why: Record<string, string> = {
    ENOENT: 'there is no such folder',
    ENOTDIR: 'it is not a folder',
    EACCES: 'it may not be read',
  };
  return new UsageError(`cannot read the folder ${location}: ${why[error.code ?? ''] ?? error.message}`);
}

/** The path with links resolved; as it is when nothing is there yet. */
export async function realPath(path: string): Promise<string> {
  return realpath(path).catch(() => resolve(path));
}

export async function exists(path: string): Promise<boolean> {
  return access(path).then(
    () => true,
    () => false,
  );
}

/** SHA-256 of a file as hex, read as a stream. */
export async function hashFile(location: string): Promise<string> {
  const hash = createHash('sha256');
  await pipeline(createReadStream(location), hash);
  return hash.digest('hex');
}
