import { createHash } from 'node:crypto';
import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import {
  createCampaign,
  deleteCampaign,
  FILE_LIMIT_BYTES,
  findCampaign,
  findScan,
  listCampaigns,
  receiveFile,
  renameCampaign,
} from '../../jobs/store/index.ts';
import { campaigns, files, jobs, scans } from '../../schema/tables/index.ts';
import { forEachTest } from '../runner/each-test.ts';
import { drain, newCampaign, rowsOf, send, type TestPorts } from '../runner/test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

async function originals(): Promise<string[]> {
  const keys: string[] = [];
  for await (const { key } of ports.blobs.list('originals/')) keys.push(key);
  return keys;
}

/** A stream of `size` bytes in chunks of 64 kB. */
function streamOf(size: number): ReadableStream<Uint8Array> {
  let left = size;
  return new ReadableStream({
    pull(controller) {
      const chunk = new Uint8Array(Math.min(left, 65_536)).fill(65);
      left -= chunk.byteLength;
      if (chunk.byteLength > 0) controller.enqueue(chunk);
      else controller.close();
    },
  });
}

describe('receiving', () => {
  it('keeps the original unchanged under its hash, with one scan and its jobs', async () => {
    const bytes = new TextEncoder().encode('rate 1');
    const answer = await receiveFile(ports, campaign, 'A/oven/1.txt', bytes);
    expect(answer).toEqual({
      file: 'A/oven/1.txt',
      outcome: 'accepted',
      scan_ids: [expect.stringMatching(/^s_/)],
      job_id: expect.stringMatching(/^j_/),
    });
    const [file] = await ports.database.read.select().from(files);
    // FIPS 180-4 hash by another road: node's digest of the same bytes.
    expect(file.sha256).toBe(createHash('sha256').update('rate 1').digest('hex'));
    expect(Buffer.from(await ports.blobs.bytes(file.blobKey)).toString()).toBe('rate 1');
    expect((await ports.database.read.select().from(jobs)).map((job) => job.step).sort()).toEqual([
      'assign-scans',
      'read-scan',
    ]);
    const view = await findScan(ports, answer.scan_ids?.[0] as string);
    expect(view).toMatchObject({ campaignId: campaign, originalKey: file.blobKey, bytes: 6 });
    expect(await findScan(ports, answer.scan_ids?.[0] as string, 'elsewhere')).toBeUndefined();
  });

  it.each([
    ['a held body', 1000],
    ['a streamed body', 5_000_000],
  ])('takes %s with or without its length, and knows it again', async (_name, size) => {
    expect((await receiveFile(ports, campaign, 'a.txt', streamOf(size), size)).outcome).toBe('accepted');
    expect((await receiveFile(ports, campaign, 'a.txt', streamOf(size), size)).outcome).toBe('known');
    expect((await receiveFile(ports, campaign, 'a.txt', streamOf(size))).outcome).toBe('known');
    expect(await originals()).toHaveLength(1);
    const [file] = await ports.database.read.select().from(files);
    expect(file.bytes).toBe(size);
    expect(file.sha256).toBe(createHash('sha256').update(Buffer.alloc(size, 65)).digest('hex'));
  });

  it.each([
    ['fewer bytes than announced', 900, 1000],
    ['more bytes than announced', 1100, 1000],
    ['fewer bytes of a large file', 4_900_000, 5_000_000],
    ['more bytes of a large file', 5_100_000, 5_000_000],
  ])('refuses %s and keeps nothing', async (_name, size, length) => {
    const answer = await receiveFile(ports, campaign, 'a.txt', streamOf(size), length);
    expect(answer.outcome).toBe('refused');
    expect(answer.reason).toMatch(new RegExp(`announced ${length}`));
    expect(await originals()).toEqual([]);
    expect(await ports.database.read.select().from(files)).toEqual([]);
  });

  it('refuses what is announced above the limit without reading it', async () => {
    let pulled = false;
    const body = new ReadableStream<Uint8Array>({ pull: () => void (pulled = true) }, { highWaterMark: 0 });
    const answer = await receiveFile(ports, campaign, 'a.txt', body, FILE_LIMIT_BYTES + 1);
    expect(answer).toMatchObject({ outcome: 'refused', reason: expect.stringContaining(String(FILE_LIMIT_BYTES)) });
    expect(pulled).toBe(false);
  });

  it.each([
    '',
    '../a.txt',
    '/a.txt',
    'a//b.txt',
    'a\\b.txt',
    '=a.txt',
    'a/-b.txt',
    'a\u0000.txt',
    `${'a'.repeat(513)}`,
  ])('refuses the path %j and says why', async (path) => {
    const answer = await send(ports, campaign, path, 'rate 1');
    expect(answer.outcome).toBe('refused');
    expect(answer.reason).toMatch(/^the path «.*» (is|has|holds|starts) /s);
  });

  it('keeps nothing for a campaign that is not there', async () => {
    await expect(send(ports, 'c_none', 'a.txt', 'rate 1')).rejects.toMatchObject({ code: 'campaign-unknown' });
    await expect(receiveFile(ports, 'c_none', 'a.txt', streamOf(5e6), 5e6)).rejects.toMatchObject({
      code: 'campaign-unknown',
    });
    expect(await originals()).toEqual([]);
  });

  it('makes one scan of the same file sent ten times at once', async () => {
    const answers = await Promise.all(
      Array.from({ length: 10 }, () => send(ports, campaign, 'A/oven/1.txt', 'rate 1')),
    );
    expect(answers.map((answer) => answer.outcome).sort()).toEqual(['accepted', ...Array(9).fill('known')]);
    expect(await ports.database.read.select().from(scans)).toHaveLength(1);
  });

  it('never compares the bytes of two campaigns', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    const other = await newCampaign(ports, 'other');
    expect((await send(ports, other, 'A/oven/1.txt', 'rate 1')).outcome).toBe('accepted');
    expect(await originals()).toHaveLength(2);
  });

  it('says in scans.csv which archive could not be unpacked', async () => {
    expect((await send(ports, campaign, 'scans.zip', 'no zip at all')).outcome).toBe('archive');
    await drain(ports, campaign);
    expect(await rowsOf(ports, campaign, 'scans')).toMatchObject([
      { file: 'scans.zip', sample: null, status: 'set_aside', flags: ['file-damaged'] },
    ]);
  });
});

describe('campaigns', () => {
  it('are found by id or name within their lab, and listed by id', async () => {
    const theirs = await createCampaign(ports, 'trial', 'elsewhere');
    expect(await findCampaign(ports, 'trial')).toMatchObject({ id: campaign });
    expect(await findCampaign(ports, campaign)).toMatchObject({ name: 'trial' });
    expect(await findCampaign(ports, theirs.id)).toBeUndefined();
    for (const name of ['b', 'c', 'd']) await createCampaign(ports, name);
    const all = await listCampaigns(ports);
    expect(all).toHaveLength(4);
    expect(all.map((c) => c.id)).toEqual(all.map((c) => c.id).sort());
    expect(await listCampaigns(ports, { after: all[1].id, limit: 1 })).toEqual([all[2]]);
  });

  it.each(['', ' a', 'a ', 'x'.repeat(81), 'a\nb'])('refuse the name %j', async (name) => {
    await expect(createCampaign(ports, name)).rejects.toMatchObject({ code: 'name-invalid' });
  });

  it('refuse a name that is taken, also when renamed', async () => {
    await expect(createCampaign(ports, 'trial')).rejects.toMatchObject({ code: 'name-taken' });
    const other = await createCampaign(ports, 'other');
    await expect(renameCampaign(ports, other.id, 'trial')).rejects.toMatchObject({ code: 'name-taken' });
    expect(await renameCampaign(ports, other.id, 'third')).toMatchObject({ id: other.id, name: 'third' });
    await expect(renameCampaign(ports, 'c_none', 'x')).rejects.toMatchObject({ code: 'campaign-unknown' });
  });

  it('go with everything in them', async () => {
    await send(ports, campaign, 'A/oven/1.txt', 'rate 1');
    await drain(ports, campaign);
    await deleteCampaign(ports, campaign);
    for (const table of [campaigns, files, scans, jobs])
      expect(await ports.database.read.select().from(table)).toEqual([]);
    for (const prefix of ['originals/', 'derived/']) {
      for await (const { key } of ports.blobs.list(prefix)) expect.fail(`${key} was left`);
    }
  });
});

describe('one path under two names', () => {
  const plain = 'A/oven/1.txt';
  const packed = `${plain}.gz`;
  const sendPacked = (content: string) => receiveFile(ports, campaign, packed, gzipSync(content));
  const told = async () =>
    (await rowsOf(ports, campaign, 'scans')).map(({ file, status, reason }) => [file, status, reason]).sort();

  it('the plain file after the packed one says so, and the older row says why', async () => {
    await sendPacked('rate 1');
    await drain(ports, campaign);
    expect(await send(ports, campaign, plain, 'rate 2')).toMatchObject({ outcome: 'replaced', replaces: packed });
    await drain(ports, campaign);
    expect(await told()).toEqual([
      [plain, 'reduced', null],
      [plain, 'superseded', `«${plain}» came later and stands in its place`],
    ]);
    // The packed one again is no longer known: it came last, so it counts.
    expect(await sendPacked('rate 1')).toMatchObject({ outcome: 'archive', replaces: plain });
    await drain(ports, campaign);
    expect(await told()).toEqual([
      [plain, 'reduced', null],
      [plain, 'superseded', `«${packed}» came later and stands in its place`],
    ]);
    const [live] = (await rowsOf(ports, campaign, 'scans')).filter((row) => row.status === 'reduced');
    expect(live.rate_K_per_s).toBe(1);
  });

  it('a packed file that is overtaken before it is unpacked does not come back over the later one', async () => {
    await sendPacked('rate 1');
    expect(await send(ports, campaign, plain, 'rate 2')).toMatchObject({ outcome: 'accepted', replaces: packed });
    await drain(ports, campaign);
    expect(await told()).toEqual([
      [plain, 'reduced', null],
      [packed, 'superseded', `«${plain}» came later and stands in its place`],
    ]);
    expect((await rowsOf(ports, campaign, 'scans'))[0].rate_K_per_s).toBe(2);
    expect(await originals()).toHaveLength(2);
  });

  it('the same bytes under both names, or the same name again, replace no other name', async () => {
    await send(ports, campaign, plain, 'rate 1');
    await send(ports, campaign, plain, 'rate 2');
    await drain(ports, campaign);
    expect((await told()).map(([, status, reason]) => [status, reason])).toEqual([
      ['reduced', null],
      ['superseded', null],
    ]);
    await sendPacked('rate 2');
    await drain(ports, campaign);
    expect((await told()).filter(([, status]) => status === 'superseded')).toHaveLength(1);
    await sendPacked('rate 2');
    expect(await sendPacked('rate 2')).toEqual({ file: packed, outcome: 'known', scan_ids: [] });
  });
});
