import type { Ports } from '../ports/index.ts';
import { createId } from './ids.ts';
import { allRows, runBatch, text } from './statement.ts';

const markerOf = async (ports: Ports): Promise<string> => {
  await ports.database.write((db) =>
    runBatch(db, [text`insert into identity (one, id) values (1, ${createId('database')}) on conflict do nothing`]),
  );
  const [{ id }] = await allRows<{ id: string }>(ports.database.read, text`select id from identity`);
  return `marker/${id}`;
};

/** Marks the blob store as the one that belongs to the database. Marking twice changes nothing. */
export async function markBlobStore(ports: Ports): Promise<void> {
  const marker = await markerOf(ports);
  if (!(await ports.blobs.has(marker)))
    await ports.blobs.put(marker, new TextEncoder().encode('The originals and curves of one database lie here.\n'));
}

/** Whether the blob store is the one that belongs to the database: a worker with another would find no original. */
export async function isBlobStoreMarked(ports: Ports): Promise<boolean> {
  return ports.blobs.has(await markerOf(ports));
}
