import { createReadStream, createWriteStream } from 'node:fs';
import { mkdtemp, open, rename, rm, stat } from 'node:fs/promises';
import { dirname, join, resolve } from 'node:path';
import { pipeline } from 'node:stream/promises';
import { createGzip } from 'node:zlib';
import { BlobMissing, type Ports } from '../../ports/index.ts';
import { snapshotDatabase } from '../../store/index.ts';
import { exists } from '../campaign-folder.ts';
import { isRemoteDatabase, storesFromEnvironment, withPorts } from '../environment.ts';
import { EXIT, UsageError } from '../exit.ts';
import { type TarEntry, writeTar } from '../tar.ts';
import type { Terminal } from '../terminal.ts';

/** Names within the archive. */
export const ARCHIVE_DATABASE = 'ratespan.db';
export const ARCHIVE_BLOBS = 'blobs/';

/** `backup FILE`: database and blobs in one gzipped tar, while the server goes on. */
export async function backup(
  [file]: string[],
  _values: Record<string, string | boolean | undefined>,
  terminal: Terminal,
): Promise<number> {
  const stores = storesFromEnvironment();
  if (isRemoteDatabase(stores))
    throw new UsageError('the database is remote: back it up where it runs, and the folder of RATESPAN_BLOBS with it');
  const target = resolve(file);
  if (await exists(target)) throw new UsageError(`${file} exists already; give the backup a name of its own`);
  if (!(await exists(dirname(target)))) throw new UsageError(`there is no folder ${dirname(target)}`);
  return withPorts({ ...stores, workers: 0 }, async (ports) => {
    const work = await mkdtemp(join(dirname(target), '.backup-'));
    try {
      const part = join(work, 'archive');
      const counts = { blobs: 0, bytes: 0 };
      await pipeline(writeTar(entriesOf(ports, work, counts, terminal)), createGzip(), createWriteStream(part));
      const written = await open(part);
      await written.sync();
      await written.close();
      await rename(part, target);
      terminal.note(`backed up the database and ${counts.blobs} blobs (${counts.bytes} bytes) to ${file}`);
    } finally {
      await rm(work, { recursive: true, force: true });
    }
    return EXIT.done;
  });
}

/** The database first: every blob that its rows name is stored before the row, so that all of them are there to be copied. */
async function* entriesOf(
  ports: Ports,
  work: string,
  counts: { blobs: number; bytes: number },
  terminal: Terminal,
): AsyncGenerator<TarEntry> {
  const snapshot = join(work, 'snapshot.db');
  await snapshotDatabase(ports, snapshot);
  yield { name: ARCHIVE_DATABASE, size: (await stat(snapshot)).size, body: createReadStream(snapshot) };
  for (const prefix of ['marker/', 'originals/', 'derived/']) {
    for await (const { key, size } of ports.blobs.list(prefix)) {
      terminal.interrupt.throwIfAborted();
      const body = await ports.blobs.get(key).catch((error) => {
        // Deleted since it was listed: the snapshot's rows that named it were on their way out.
        if (error instanceof BlobMissing) return undefined;
        throw error;
      });
      if (!body) continue;
      counts.blobs++;
      counts.bytes += size;
      yield { name: ARCHIVE_BLOBS + key, size, body: body as unknown as AsyncIterable<Uint8Array> };
    }
  }
}
