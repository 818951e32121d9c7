import { mkdtemp, readdir, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { getTableColumns, getTableName, is } from 'drizzle-orm';
import { SQLiteTable } from 'drizzle-orm/sqlite-core';
import { describe, expect, test } from 'vitest';
import { openFileDatabase } from '../../jobs/adapters/libsql-node.ts';
import { migrateDatabase } from '../../jobs/adapters/migrate.ts';
import { allRows, text } from '../../jobs/store/statement.ts';
import * as tables from '../../schema/tables/index.ts';

const FOLDER = fileURLToPath(new URL('../../schema/migrations', import.meta.url));
const journal = JSON.parse(await readFile(join(FOLDER, 'meta/_journal.json'), 'utf8')) as {
  entries: { tag: string; when: number }[];
};

/** Statements that take away, each with its reason. */
const TAKES_AWAY: Record<string, string> = {
  'ALTER TABLE `plans` DROP COLUMN `advice`;':
    'came and went before the first release: no worker that runs anywhere names it',
};

describe('migrations', () => {
  // The migrator compares the newest timestamp only: one that is merged late with an older one would be skipped in silence.
  test('have timestamps that only grow, and a file each', async () => {
    const times = journal.entries.map((entry) => entry.when);
    expect(times).toEqual([...new Set(times)].sort((a, b) => a - b));
    const files = (await readdir(FOLDER)).filter((name) => name.endsWith('.sql')).sort();
    expect(files).toEqual(journal.entries.map((entry) => `${entry.tag}.sql`));
  });

  test('after the first only add and fill what they added, so that a worker of the version before goes on beside them', async () => {
    for (const { tag } of journal.entries.slice(1)) {
      const sql = await readFile(join(FOLDER, `${tag}.sql`), 'utf8');
      for (const statement of sql.split('--> statement-breakpoint').map((s) => s.trim())) {
        if (statement in TAKES_AWAY) continue;
        expect(statement, tag).toMatch(/^(CREATE (TABLE|INDEX|UNIQUE INDEX)|ALTER TABLE `\w+` ADD|UPDATE) /);
        // An older worker leaves a new column out of its inserts.
        if (/^ALTER/.test(statement) && /NOT NULL/.test(statement)) expect(statement, tag).toMatch(/DEFAULT/);
      }
    }
  });

  test('lead a fresh database to the tables that the program knows; two processes at once and a second time too', async () => {
    const folder = await mkdtemp(join(tmpdir(), 'ratespan-migrations-'));
    const databases = await Promise.all([1, 2, 3].map(() => openFileDatabase(join(folder, 'fresh.db'))));
    try {
      await Promise.all(databases.map(migrateDatabase));
      await migrateDatabase(databases[0]);
      const found: Record<string, string[]> = {};
      const wanted: Record<string, string[]> = {};
      for (const table of Object.values(tables).filter((value) => is(value, SQLiteTable))) {
        const name = getTableName(table as SQLiteTable);
        wanted[name] = Object.values(getTableColumns(table as SQLiteTable))
          .map((column) => column.name)
          .sort();
        const rows = await allRows<{ name: string }>(
          databases[0].read,
          text`select name from pragma_table_info(${name})`,
        );
        found[name] = rows.map((row) => row.name).sort();
      }
      expect(found).toEqual(wanted);
      expect(Object.keys(wanted).length).toBeGreaterThan(12);
    } finally {
      for (const database of databases) database.close();
      await rm(folder, { recursive: true, force: true });
    }
  });
});
