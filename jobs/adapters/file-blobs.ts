import { randomBytes } from 'node:crypto';
import * as fs from 'node:fs';
import { mkdir, opendir, readdir, rename, rm, stat } from 'node:fs/promises';
import { dirname, join, relative, sep } from 'node:path';
import { Readable } from 'node:stream';
import { promisify } from 'node:util';
import { BlobMissing, type BlobStore } from '../ports/index.ts';

// By file number: a handle object for each of many small files takes more time than the files.
const open = promisify(fs.open);
const write = promisify(fs.write) as (fd: number, bytes: Uint8Array) => Promise<{ bytesWritten: number }>;
const datasync = promisify(fs.fdatasync);
const close = promisify(fs.close);
const readFile = promisify(fs.readFile);

const PART_AGE_MS = 86_400_000;

const isMissing = (error: unknown) => (error as { code?: string }).code === 'ENOENT';

export interface FileBlobsOptions {
  /**
   * Small derived blobs are written and read within the call. Each asynchronous call goes to another thread and back, which
   * takes three times the time of the call itself; a process that answers requests must not wait for a disk all the same.
   */
  blocking?: boolean;
}

/** Largest blob that is written within the call, bytes. */
const AT_ONCE_BYTES = 1e6;

/**
 * Blobs as files below `root`. A blob is written under a temporary name and renamed, so that a key is either absent or
 * whole, also after a crash of the process. Originals are flushed to the disk first, so that they outlast a power cut too;
 * derived blobs are not: a damaged one is made again, and waiting for the disk twice a scan is what a campaign would wait for.
 */
export function createFileBlobs(root: string, { blocking = false }: FileBlobsOptions = {}): BlobStore {
  const partsFolder = join(root, 'parts');
  const known = new Set<string>();

  const pathOf = (key: string): string => {
    if (!/^[\w.-]+(\/[\w.-]+)+$/.test(key) || key.split('/').some((part) => /^\.+$/.test(part))) {
      throw new RangeError(
        `a blob key is made of at least two parts of letters, digits, _ . - with / between; got ${JSON.stringify(key)}`,
      );
    }
    return join(root, ...key.split('/'));
  };
  const makeFolder = async (folder: string): Promise<void> => {
    if (known.has(folder)) return;
    await mkdir(folder, { recursive: true });
    known.add(folder);
    if (folder === partsFolder) await removeOldParts(folder);
  };
  const missing =
    (key: string) =>
    (error: unknown): never => {
      throw isMissing(error) ? new BlobMissing(key) : error;
    };

  return {
    async put(key, body, length) {
      const path = pathOf(key);
      await makeFolder(partsFolder);
      await makeFolder(dirname(path));
      const part = join(partsFolder, randomBytes(12).toString('hex'));
      const whole = body instanceof Uint8Array && body.byteLength === (length ?? body.byteLength) ? body : undefined;
      if (blocking && isDerived(key) && whole && whole.byteLength <= AT_ONCE_BYTES)
        return writeAtOnce(part, path, whole);
      try {
        const file = await open(part, 'wx');
        try {
          await writeBody(file, key, body, length);
          if (!isDerived(key)) await datasync(file);
        } finally {
          await close(file);
        }
        await rename(part, path);
      } catch (error) {
        await rm(part, { force: true });
        throw error;
      }
    },
    async get(key) {
      const file = await open(pathOf(key), 'r').catch(missing(key));
      return Readable.toWeb(fs.createReadStream('', { fd: file })) as ReadableStream<Uint8Array>;
    },
    async bytes(key) {
      const { buffer, byteOffset, byteLength } = blocking
        ? readAtOnce(pathOf(key), key)
        : await readFile(pathOf(key)).catch(missing(key));
      return new Uint8Array(buffer, byteOffset, byteLength);
    },
    async has(key) {
      return (
        (await stat(pathOf(key)).catch((error) => (isMissing(error) ? undefined : Promise.reject(error)))) !== undefined
      );
    },
    delete: (key) => rm(pathOf(key), { force: true }),
    async *list(prefix) {
      // The folder part of the prefix is enough to start from; the rest is compared key by key.
      const start = join(root, ...prefix.split('/').slice(0, -1));
      const folder = await opendir(start, { recursive: true }).catch((error) =>
        isMissing(error) ? undefined : Promise.reject(error),
      );
      if (!folder) return;
      for await (const entry of folder) {
        if (!entry.isFile()) continue;
        const path = join(entry.parentPath, entry.name);
        const key = relative(root, path).split(sep).join('/');
        if (key.startsWith('parts/') || !key.startsWith(prefix)) continue;
        const { size, mtimeMs } = await stat(path);
        yield { key, size, modifiedMs: mtimeMs };
      }
    },
  };
}

/** What crashed processes left half written; a part of a living one is younger. */
async function removeOldParts(folder: string): Promise<void> {
  for (const name of await readdir(folder)) {
    const path = join(folder, name);
    const { mtimeMs } = await stat(path).catch(() => ({ mtimeMs: Number.POSITIVE_INFINITY }));
    if (Date.now() - mtimeMs > PART_AGE_MS) await rm(path, { force: true });
  }
}

/** A missing blob is found out by a question that throws nothing: most look-ups of a first run miss. */
function readAtOnce(path: string, key: string): Buffer {
  if (!fs.statSync(path, { throwIfNoEntry: false })) throw new BlobMissing(key);
  try {
    return fs.readFileSync(path);
  } catch (error) {
    throw isMissing(error) ? new BlobMissing(key) : error;
  }
}

function writeAtOnce(part: string, path: string, bytes: Uint8Array): void {
  try {
    const file = fs.openSync(part, 'wx');
    try {
      for (let at = 0; at < bytes.byteLength; ) at += fs.writeSync(file, bytes.subarray(at));
    } finally {
      fs.closeSync(file);
    }
    fs.renameSync(part, path);
  } catch (error) {
    fs.rmSync(part, { force: true });
    throw error;
  }
}

const isDerived = (key: string): boolean => key.startsWith('derived/');

async function writeAll(file: number, bytes: Uint8Array): Promise<void> {
  for (let at = 0; at < bytes.byteLength; ) at += (await write(file, bytes.subarray(at))).bytesWritten;
}

async function writeBody(
  file: number,
  key: string,
  body: ReadableStream<Uint8Array> | Uint8Array,
  length: number | undefined,
): Promise<void> {
  let size = 0;
  if (body instanceof Uint8Array) {
    await writeAll(file, body);
    size = body.byteLength;
  } else {
    for await (const chunk of body as unknown as AsyncIterable<Uint8Array>) {
      await writeAll(file, chunk);
      size += chunk.byteLength;
    }
  }
  if (length !== undefined && size !== length) {
    throw new RangeError(`blob ${key}: ${size} bytes came, ${length} were announced`);
  }
}
