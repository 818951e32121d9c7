import { sql } from 'drizzle-orm';
import { expect, it } from 'vitest';
import type { Ports } from '../../jobs/ports/index.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { LEASE_MS } from '../../jobs/store/leases.ts';
import { allTables, drain, newCampaign, openTestPorts, send, type TestPorts } from './test-ports.ts';

const FILES = [
  ['scans.csv', 'file,sample,instrument\n1.txt,A,oven\n2.txt,A,oven\nbad.txt,A,oven\n'],
  ['1.txt', 'rate 1'],
  ['2.txt', 'rate 2'],
  ['bad.txt', 'bad'],
] as const;

/** Ports of a process that dies at its `deathAt`-th change of a store: that change and everything after it does not happen. */
function mortalPorts(ports: TestPorts, deathAt: number): { ports: Ports; dead: () => boolean } {
  let changes = 0;
  const change = () => {
    if (++changes >= deathAt) throw new Error('the process is gone');
  };
  const alive = () => {
    if (changes >= deathAt) throw new Error('the process is gone');
  };
  return {
    dead: () => changes >= deathAt,
    ports: {
      ...ports,
      database: {
        get read() {
          alive();
          return ports.database.read;
        },
        write: async (work) => {
          change();
          return ports.database.write(work);
        },
        close: () => {},
      },
      blobs: {
        ...ports.blobs,
        put: async (...args) => {
          change();
          return ports.blobs.put(...args);
        },
        delete: async (key) => {
          change();
          return ports.blobs.delete(key);
        },
      },
    },
  };
}

async function sendAll(ports: Ports, campaign: string): Promise<void> {
  for (const [path, text] of FILES) await send(ports, campaign, path, text);
}

/** Every blob that a row names is there, and no job is left. */
async function expectWhole(ports: TestPorts, campaign: string): Promise<void> {
  const named = await ports.database.read.all<{ key: string }>(sql`
    select blob_key as key from files where campaign_id = ${campaign}
    union all select reduced_key from scans where campaign_id = ${campaign} and reduced_key is not null`);
  for (const { key } of named) expect(await ports.blobs.has(key), key).toBe(true);
  const open = await ports.database.read.all(
    sql`select * from jobs where campaign_id = ${campaign} and state <> 'done'`,
  );
  expect(open).toEqual([]);
}

it('a process that dies at any change of a store leaves nothing that the next one cannot finish', {
  timeout: 60_000,
}, async () => {
  const ports = await openTestPorts();
  try {
    const whole = await newCampaign(ports, 'whole');
    await sendAll(ports, whole);
    await drain(ports, whole);
    const expected = await allTables(ports, whole);

    let deathAt = 0;
    for (let died = true; died; ) {
      deathAt++;
      const campaign = await newCampaign(ports, `death at ${deathAt}`);
      const mortal = mortalPorts(ports, deathAt);
      try {
        await sendAll(mortal.ports, campaign);
        await createRunner(mortal.ports, { concurrency: 1, owner: 'mortal' }).drain(campaign);
      } catch (error) {
        expect(String(error)).toContain('the process is gone');
      }
      died = mortal.dead();
      // Its leases lapse; the sender, who got no answer, sends everything again.
      ports.clock.advance(LEASE_MS + 1);
      await sendAll(ports, campaign);
      await drain(ports, campaign);
      await expectWhole(ports, campaign);
      expect(await allTables(ports, campaign), `death at change ${deathAt}`).toBe(expected);
    }
    // The control: there were as many deaths as a campaign has changes.
    expect(deathAt).toBeGreaterThan(25);
  } finally {
    await ports.close();
  }
});
