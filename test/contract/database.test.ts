import { fork } from 'node:child_process';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { eq, sql } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { openFileDatabase } from '../../jobs/adapters/libsql-node.ts';
import { openRemoteDatabase } from '../../jobs/adapters/libsql-web.ts';
import { migrateDatabase } from '../../jobs/adapters/migrate.ts';
import type { Database } from '../../jobs/ports/index.ts';
import { guarded, isConstraint, isFenceBreak, runBatch } from '../../jobs/store/fence.ts';
import { campaigns, fence, flags } from '../../schema/tables/index.ts';
import { startHranaBridge } from '../runtime/hrana-bridge.ts';

interface Opened {
  database: Database;
  close(): Promise<void>;
}

const adapters: Record<string, (file: string) => Promise<Opened>> = {
  'libsql-node': async (file) => {
    const database = await openFileDatabase(file);
    return { database, close: async () => database.close() };
  },
  'libsql-web': async (file) => {
    const bridge = await startHranaBridge(file, 'secret');
    const database = openRemoteDatabase(bridge.url, 'secret');
    return {
      database,
      async close() {
        database.close();
        await bridge.close();
      },
    };
  },
};

const campaign = (id: string) => ({ id, lab: 'local', name: id, createdAt: 1 });

describe.each(Object.entries(adapters))('database by %s', (_name, open) => {
  let folder: string;
  let opened: Opened;
  let database: Database;
  beforeEach(async () => {
    folder = await mkdtemp(join(tmpdir(), 'ratespan-test-'));
    opened = await open(join(folder, 'trial # 100% ?.db'));
    database = opened.database;
    await migrateDatabase(database);
  });
  afterEach(async () => {
    await opened.close();
    await rm(folder, { recursive: true, force: true });
  });

  it('migrates twice without harm and reads what it wrote', async () => {
    await migrateDatabase(database);
    await database.write((db) => db.insert(campaigns).values(campaign('c1')));
    expect(await database.read.select().from(campaigns)).toMatchObject([{ id: 'c1', revision: 0, createdAt: 1 }]);
  });

  it('keeps JSON, booleans, missing values and numbers to the last digit', async () => {
    await database.write((db) => db.insert(campaigns).values(campaign('c1')));
    const body = { severity: 'note' as const, code: 'spike' as const, detail: 'a « b', action: 'x', event: 0.1 + 0.2 };
    await database.write((db) => db.insert(flags).values({ campaignId: 'c1', source: 's', position: 3, body }));
    expect(await database.read.select().from(flags)).toEqual([{ campaignId: 'c1', source: 's', position: 3, body }]);
  });

  it('does a batch whole or not at all', async () => {
    const broken = database.write((db) =>
      runBatch(db, [db.insert(campaigns).values(campaign('c1')), db.insert(campaigns).values(campaign('c1'))]),
    );
    await expect(broken).rejects.toSatisfy(isConstraint);
    expect(await database.read.select().from(campaigns)).toEqual([]);
    // The control: a broken batch does not harm the next write.
    await database.write((db) => db.insert(campaigns).values(campaign('c1')));
    expect(await database.read.select().from(campaigns)).toHaveLength(1);
  });

  it('rejects a guarded batch whose guard changed nothing, as a broken fence', async () => {
    await database.write((db) => db.insert(campaigns).values(campaign('c1')));
    const guardedWrite = (id: string) =>
      database.write((db) =>
        runBatch(
          db,
          guarded(db.update(campaigns).set({ revision: 7 }).where(eq(campaigns.id, id)), [
            db.insert(campaigns).values(campaign(`after ${id}`)),
          ]),
        ),
      );
    await expect(guardedWrite('nobody')).rejects.toSatisfy(isFenceBreak);
    expect(await database.read.select().from(campaigns)).toHaveLength(1);
    await guardedWrite('c1');
    await guardedWrite('c1').catch((error) => expect(isFenceBreak(error)).toBe(false));
    expect((await database.read.select().from(campaigns)).map((row) => row.id).sort()).toEqual(['after c1', 'c1']);
    expect((await database.read.select().from(fence)).length).toBeLessThanOrEqual(1);
  });

  it('holds to foreign keys and cascades', async () => {
    const orphan = database.write((db) =>
      db.insert(flags).values({ campaignId: 'none', source: 's', position: 0, body: {} as never }),
    );
    await expect(orphan).rejects.toSatisfy(isConstraint);
    await database.write((db) => db.insert(campaigns).values(campaign('c1')));
    await database.write((db) =>
      db.insert(flags).values({ campaignId: 'c1', source: 's', position: 0, body: {} as never }),
    );
    await database.write((db) => db.delete(campaigns));
    expect(await database.read.select().from(flags)).toEqual([]);
  });

  it('gives the rows of an update, and none where nothing matched', async () => {
    await database.write((db) => db.insert(campaigns).values([campaign('c1'), campaign('c2')]));
    const claimOne = () =>
      database.write((db) =>
        db.all<{ id: string }>(sql`update campaigns set revision = 1 where id in (
          select id from campaigns where revision = 0 order by id limit 1) returning id`),
      );
    expect(await claimOne()).toEqual([{ id: 'c1' }]);
    expect(await claimOne()).toEqual([{ id: 'c2' }]);
    expect(await claimOne()).toEqual([]);
  });

  it('does many writes asked for at once', async () => {
    await Promise.all(
      Array.from({ length: 40 }, (_, i) => database.write((db) => db.insert(campaigns).values(campaign(`c${i}`)))),
    );
    expect(await database.read.select().from(campaigns)).toHaveLength(40);
  });
});

describe('libsql-node beside another process', () => {
  it('loses no write while both keep meeting the other’s lock', { timeout: 30_000 }, async () => {
    const folder = await mkdtemp(join(tmpdir(), 'ratespan-test-'));
    const file = join(folder, 'shared.db');
    const database = await openFileDatabase(file);
    try {
      await migrateDatabase(database);
      const writer = fileURLToPath(new URL('./write-campaigns.ts', import.meta.url));
      const child = fork(writer, [file, 'child', '150'], { execArgv: ['--import', 'tsx'] });
      const ended = new Promise<number | null>((resolve) => child.once('exit', resolve));
      await new Promise((resolve) => child.once('message', resolve));
      for (let i = 0; i < 150; i++) await database.write((db) => db.insert(campaigns).values(campaign(`here ${i}`)));
      expect(await ended).toBe(0);
    } finally {
      database.close();
    }
    // Read through a connection that never met a lock: a poisoned one would show rows that were never committed.
    const fresh = await openFileDatabase(file);
    const names = (await fresh.read.select().from(campaigns)).map((row) => row.name);
    fresh.close();
    await rm(folder, { recursive: true, force: true });
    expect(names.filter((name) => name.startsWith('here'))).toHaveLength(150);
    expect(names.filter((name) => name.startsWith('child'))).toHaveLength(150);
  });

  it('repeats a write that met a lock, on a connection of its own making', async () => {
    const folder = await mkdtemp(join(tmpdir(), 'ratespan-test-'));
    const file = join(folder, 'shared.db');
    const [one, other] = [await openFileDatabase(file), await openFileDatabase(file)];
    await migrateDatabase(one);
    let release: () => void = () => {};
    const held = new Promise<void>((resolve) => {
      release = resolve;
    });
    const holding = other.write((db) =>
      db.transaction(async (tx) => {
        await tx.insert(campaigns).values(campaign('held'));
        await held;
      }),
    );
    let done = false;
    const waiting = one
      .write((db) => db.insert(campaigns).values(campaign('waited')))
      .then(() => {
        done = true;
      });
    await new Promise((resolve) => setTimeout(resolve, 150));
    expect(done).toBe(false);
    // Readers go on meanwhile, and see nothing unfinished.
    expect(await one.read.select().from(campaigns)).toEqual([]);
    release();
    await Promise.all([holding, waiting]);
    one.close();
    const seen = (await other.read.select().from(campaigns)).map((row) => row.id).sort();
    other.close();
    await rm(folder, { recursive: true, force: true });
    expect(seen).toEqual(['held', 'waited']);
  });
});
