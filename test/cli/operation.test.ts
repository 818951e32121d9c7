import { mkdir, readdir, readFile, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { gunzipSync, gzipSync } from 'node:zlib';
import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest';
import { closePorts, openNodePorts } from '../../jobs/adapters/node-ports.ts';
import { createCampaign, receiveFile } from '../../jobs/store/index.ts';
import { startHranaBridge } from '../runtime/hrana-bridge.ts';
import { runHere, startCli, temporaryFolder } from './helpers.ts';

let data: string;
beforeEach(async () => {
  data = join(await temporaryFolder(), 'data');
  vi.stubEnv('RATESPAN_DATA', data);
  vi.stubEnv('RATESPAN_DB_URL', '');
  vi.stubEnv('RATESPAN_BLOBS', '');
});
afterEach(() => {
  vi.unstubAllEnvs();
});

describe('token', () => {
  test('add prints the token alone, list shows everything but it, revoke ends it', async () => {
    const added = await runHere(['token', 'add', '--lab', 'glass-lab', '--role', 'sender', '--days', '30']);
    expect(added.code).toBe(0);
    // 256 bits are 43 characters of base64url (RFC 4648, 5).
    expect(added.out).toMatch(/^t_[0-9a-f]{24}\.[\w-]{43}\n$/);
    const [id, secret] = added.out.trim().split('.');
    const listed = await runHere(['token', 'list']);
    expect(listed.out).toContain(`${id}  glass-lab  sender`);
    expect(listed.out + listed.err + added.err).not.toContain(secret);
    expect((await runHere(['token', 'revoke', id])).code).toBe(0);
    expect((await runHere(['token', 'list'])).out).toMatch(/revoked \d{4}-\d\d-\d\d\n$/);
    expect((await readFile(join(data, 'ratespan.db'))).includes(secret)).toBe(false);
  });

  test.each([
    [['token'], 'add|list|revoke is missing'],
    [['token', 'make'], 'add, list or revoke ID is wanted, not "make"'],
    [['token', 'add'], 'add needs --lab LAB and --role reader|sender|keeper'],
    [['token', 'add', '--lab', 'a', '--role', 'owner'], 'one of reader, sender, keeper; got "owner"'],
    [['token', 'add', '--lab', "a'; --", '--role', 'reader'], 'a lab name has 1 to 40'],
    [['token', 'add', '--lab', 'a', '--role', 'reader', '--days', '0'], '--days takes a whole number from 1 to 3650'],
    [['token', 'add', 'x', '--lab', 'a', '--role', 'reader'], 'add takes no ID'],
    [['token', 'revoke'], 'revoke needs the ID'],
    [['token', 'revoke', 't_none'], 'there is no token "t_none"'],
  ])('%j is refused', async (args, said) => {
    const { code, err } = await runHere(args);
    expect([code, err]).toEqual([2, expect.stringContaining(said)]);
  });
});

test('serve refuses an address that others reach until a token exists', async () => {
  const refused = await runHere(['serve', '--host', '0.0.0.0', '--port', '0', '--workers', '0']);
  expect([refused.code, refused.err]).toEqual([2, expect.stringMatching(/refusing to listen .* ratespan token add/)]);
  const token = (await runHere(['token', 'add', '--lab', 'a', '--role', 'keeper'])).out.trim();
  const server = startCli(['serve', '--host', '0.0.0.0', '--port', '0', '--workers', '0'], { RATESPAN_DATA: data });
  const port = /:(\d+)/.exec(await server.until('\n'))?.[1];
  const ask = (headers: Record<string, string>) =>
    fetch(`http://127.0.0.1:${port}/v1/campaigns`, { headers }).then((r) => r.status);
  expect(await ask({})).toBe(401);
  expect(await ask({ authorization: `Bearer ${token}` })).toBe(200);
  // Behind a proxy a token is enough.
  expect(await ask({ authorization: `Bearer ${token}`, 'x-forwarded-for': '192.0.2.1' })).toBe(200);
  server.stop();
  const { code, err } = await server.finished;
  expect(code).toBe(0);
  expect(err).not.toContain(token.split('.')[1]);
  const requests = err.split('\n').filter((line) => line.startsWith('{'));
  expect(requests.map((line) => JSON.parse(line).status)).toEqual([401, 200, 200]);
}, 60_000);

async function fillStore(): Promise<void> {
  const ports = await openNodePorts({ dataDir: data, workers: 0 });
  const campaign = await createCampaign(ports, 'films');
  for (let i = 0; i < 5; i++) {
    const bytes = new TextEncoder().encode(`synthetic ${i} `.repeat(100 * i));
    await receiveFile(ports, campaign.id, `A/oven/${i}.txt`, bytes);
  }
  await closePorts(ports);
}

async function contents(folder: string): Promise<Record<string, string>> {
  const ports = await openNodePorts({ dataDir: folder, workers: 0 });
  const found: Record<string, string> = {};
  for await (const { key } of ports.blobs.list('originals/'))
    found[key] = Buffer.from(await ports.blobs.bytes(key)).toString();
  const { files, jobs } = await import('../../schema/tables/index.ts');
  found.rows = JSON.stringify([
    await ports.database.read.select().from(files),
    await ports.database.read.select().from(jobs),
  ]);
  await closePorts(ports);
  return found;
}

describe('backup and restore', () => {
  test('bring back every row and every byte', async () => {
    await fillStore();
    const file = join(data, '..', 'copy.tar.gz');
    const made = await runHere(['backup', file]);
    expect([made.code, made.err]).toEqual([
      0,
      expect.stringMatching(/backed up the database and 5 blobs \(\d+ bytes\)/),
    ]);
    const before = await contents(data);
    expect(Object.keys(before)).toHaveLength(6);
    vi.stubEnv('RATESPAN_DATA', join(data, '..', 'again'));
    const restored = await runHere(['restore', file]);
    expect([restored.code, restored.err]).toEqual([0, expect.stringContaining('restored the database and 5 blobs')]);
    expect(await contents(join(data, '..', 'again'))).toEqual(before);
    // Nothing half done is left beside them.
    expect((await readdir(join(data, '..'))).sort()).toEqual(['again', 'copy.tar.gz', 'data']);
  });

  test('the archive is a tar that other programs read', async () => {
    await fillStore();
    const file = join(data, '..', 'copy.tar.gz');
    await runHere(['backup', file]);
    const { execFileSync } = await import('node:child_process');
    const names = execFileSync('tar', ['tzf', file]).toString().trim().split('\n');
    expect(names[0]).toBe('ratespan.db');
    expect(names.filter((n) => n.startsWith('blobs/originals/'))).toHaveLength(5);
  });

  test('a damaged, cut or foreign archive is refused whole', async () => {
    await fillStore();
    const file = join(data, '..', 'copy.tar.gz');
    await runHere(['backup', file]);
    const whole = gunzipSync(await readFile(file));
    const write = (bytes: Uint8Array) => writeFile(file, gzipSync(bytes));
    vi.stubEnv('RATESPAN_DATA', join(data, '..', 'again'));
    const refusal = async () => (await runHere(['restore', file])).err;
    await write(whole.subarray(0, whole.length - 4000));
    expect(await refusal()).toMatch(/ends in the middle of a file/);
    const flipped = Buffer.from(whole);
    flipped[124] ^= 1;
    await write(flipped);
    expect(await refusal()).toMatch(/no archive of a backup, or it is damaged/);
    await write(Buffer.from('<html>'.repeat(200)));
    expect(await refusal()).toMatch(/no archive of a backup/);
    // A name that leads out of the folder, with its checksum put right.
    const escaping = Buffer.from(whole);
    escaping.fill(0, 0, 100).write('../../outside.db');
    escaping.write('        ', 148);
    const sum = escaping.subarray(0, 512).reduce((a, b) => a + b, 0);
    escaping.write(`${sum.toString(8).padStart(6, '0')}\0 `, 148);
    await write(escaping);
    expect(await refusal()).toMatch(/holds "\.\.\/\.\.\/outside\.db", which no backup has/);
    expect((await readdir(join(data, '..'))).sort()).toEqual(['copy.tar.gz', 'data']);
  });

  test('never write over anything', async () => {
    await fillStore();
    const file = join(data, '..', 'copy.tar.gz');
    await runHere(['backup', file]);
    expect((await runHere(['backup', file])).err).toContain('exists already');
    expect((await runHere(['restore', file])).err).toContain('is not empty');
  });
});

test('work on a remote database refuses a folder of blobs that is not its own', async () => {
  await mkdir(data, { recursive: true });
  const bridge = await startHranaBridge(join(data, 'remote.db'), 'secret');
  vi.stubEnv('RATESPAN_DB_URL', bridge.url);
  vi.stubEnv('RATESPAN_DB_TOKEN', 'secret');
  try {
    expect((await runHere(['work', '--workers', '0'])).err).toContain('set RATESPAN_BLOBS');
    vi.stubEnv('RATESPAN_BLOBS', join(data, 'elsewhere'));
    const { code, err } = await runHere(['work', '--workers', '0']);
    expect([code, err]).toEqual([2, expect.stringContaining('its marker is missing')]);
    expect((await runHere(['backup', join(data, 'b.tar.gz')])).err).toContain('the database is remote');
  } finally {
    await bridge.close();
  }
});
