import { createReadStream, createWriteStream } from 'node:fs';
import { mkdir, mkdtemp, readdir, rename, rm } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { createGunzip } from 'node:zlib';
import { findDamage } from '../../store/index.ts';
import { exists } from '../campaign-folder.ts';
import { isRemoteDatabase, storesFromEnvironment, withPorts } from '../environment.ts';
import { EXIT, UsageError } from '../exit.ts';
import { readTar } from '../tar.ts';
import type { Terminal } from '../terminal.ts';
import { ARCHIVE_BLOBS, ARCHIVE_DATABASE } from './backup.ts';

const BLOB_NAME = /^blobs(\/[\w-][\w.-]*){2,}$/;

/** `restore FILE`: puts a backup into an empty data folder, checked before anything counts. */
export async function restore(
  [file]: string[],
  _values: Record<string, string | boolean | undefined>,
  terminal: Terminal,
): Promise<number> {
  const stores = storesFromEnvironment();
  if (isRemoteDatabase(stores) || stores.databaseUrl !== undefined || stores.blobsDir !== undefined)
    throw new UsageError('restore fills the folder of RATESPAN_DATA; unset RATESPAN_DB_URL and RATESPAN_BLOBS for it');
  if (!(await exists(file))) throw new UsageError(`there is no file ${file}`);
  const target = stores.dataDir;
  if ((await readdir(target).catch(() => [])).length > 0)
    throw new UsageError(`${target} is not empty; name an empty or new folder with RATESPAN_DATA`);
  await mkdir(dirname(target), { recursive: true });
  const work = await mkdtemp(join(dirname(target), '.restore-'));
  try {
    const blobs = await unpack(file, work);
    const damage = await withPorts({ dataDir: work, workers: 0 }, findDamage);
    if (damage.length > 0)
      throw new UsageError(`${file} is damaged and was not restored: ${damage.slice(0, 5).join('; ')}`);
    await rm(target, { recursive: true, force: true });
    await rename(work, target);
    terminal.note(`restored the database and ${blobs} blobs from ${file} to ${target}`);
    return EXIT.done;
  } finally {
    await rm(work, { recursive: true, force: true });
  }
}

/** @returns number of blobs */
async function unpack(file: string, folder: string): Promise<number> {
  let blobs = 0;
  try {
    await readTar(createReadStream(file).pipe(createGunzip()), async ({ name, body }) => {
      const blob = BLOB_NAME.test(name);
      if (!blob && name !== ARCHIVE_DATABASE)
        throw new RangeError(`it holds ${JSON.stringify(name)}, which no backup has`);
      if (blob) blobs++;
      const path = join(folder, name);
      await mkdir(dirname(path), { recursive: true });
      await pipeline(Readable.from(body), createWriteStream(path, { flags: 'wx' }));
    });
  } catch (error) {
    throw new UsageError(`${file} cannot be restored: ${(error as Error).message}`);
  }
  if (!(await exists(join(folder, ARCHIVE_DATABASE)))) throw new UsageError(`${file} holds no database`);
  await mkdir(join(folder, ARCHIVE_BLOBS), { recursive: true });
  return blobs;
}
