import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { migrate } from 'drizzle-orm/libsql/migrator';
import type { Database } from '../ports/index.ts';

/** Brings the schema up to date. Of several processes that start together one wins; the others find its work done. */
export async function migrateDatabase(database: Database): Promise<void> {
  const run = () => database.write((db) => migrate(db, { migrationsFolder: migrationsFolder() }));
  try {
    await run();
  } catch {
    await run();
  }
}

/** Two folders up from the sources, one from the built file. */
function migrationsFolder(): string {
  const folders = ['../../schema/migrations', '../schema/migrations'].map((path) =>
    fileURLToPath(new URL(path, import.meta.url)),
  );
  const found = folders.find((folder) => existsSync(join(folder, 'meta', '_journal.json')));
  if (!found) throw new Error(`no migrations found in ${folders.join(' or ')}; install the package whole`);
  return found;
}
