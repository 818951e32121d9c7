import type { Ports } from '../ports/index.ts';
import { allRows, text } from './statement.ts';

/** Copies the database as it stands now into a new file, while others go on writing. Local databases only. */
export async function snapshotDatabase(ports: Ports, path: string): Promise<void> {
  await allRows(ports.database.read, text`vacuum into ${path}`);
}

/** What a restored database lacks: originals that its rows name and `has` denies, and damage that the database itself finds. */
export async function findDamage(ports: Ports): Promise<string[]> {
  const checked = await allRows<{ integrity_check: string }>(ports.database.read, text`pragma integrity_check`);
  const damage = checked.map((row) => row.integrity_check).filter((said) => said !== 'ok');
  const rows = await allRows<{ path: string; key: string }>(
    ports.database.read,
    text`select path, blob_key as key from files`,
  );
  for (const { path, key } of rows)
    if (!(await ports.blobs.has(key))) damage.push(`the original of ${path} is missing`);
  return damage;
}
