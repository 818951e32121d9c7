import { mkdtemp, readdir, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { R2Bucket } from '@cloudflare/workers-types';
import { Miniflare } from 'miniflare';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createFileBlobs } from '../../jobs/adapters/file-blobs.ts';
import { createBucketBlobs } from '../../jobs/adapters/r2-blobs.ts';
import { BlobMissing, type BlobStore } from '../../jobs/ports/index.ts';
import { runtimeProblem } from '../runtime/start-runtime.ts';

interface Opened {
  blobs: BlobStore;
  close(): Promise<void>;
}

const noRuntime = await runtimeProblem();
async function openFiles(blocking: boolean): Promise<Opened> {
  const folder = await mkdtemp(join(tmpdir(), 'ratespan-test-'));
  return { blobs: createFileBlobs(folder, { blocking }), close: () => rm(folder, { recursive: true, force: true }) };
}

const adapters: Record<string, () => Promise<Opened>> = {
  'file-blobs': () => openFiles(false),
  'file-blobs within the call': () => openFiles(true),
  'r2-blobs': async () => {
    const miniflare = new Miniflare({
      modules: [{ type: 'ESModule', path: 'none.js', contents: 'export default { fetch: () => new Response() }' }],
      cf: false,
      r2Buckets: ['BUCKET'],
    });
    const bucket = (await miniflare.getR2Bucket('BUCKET')) as unknown as R2Bucket;
    return { blobs: createBucketBlobs(bucket), close: () => miniflare.dispose() };
  },
};

const bytesOf = (text: string) => new TextEncoder().encode(text);
const streamOf = (...parts: string[]) =>
  new ReadableStream<Uint8Array>({
    start(controller) {
      for (const part of parts) controller.enqueue(bytesOf(part));
      controller.close();
    },
  });

describe.each(Object.entries(adapters))('blobs by %s', (name, open) => {
  const skip = name === 'r2-blobs' && noRuntime !== undefined;
  if (skip) it.skip(`needs the serverless runtime, which does not start here: ${noRuntime}`, () => {});
  describe.skipIf(skip)('', () => {
    let opened: Opened;
    let blobs: BlobStore;
    beforeAll(async () => {
      opened = await open();
      blobs = opened.blobs;
    });
    afterAll(() => opened?.close());

    it('gives back the bytes that were put, as bytes and as a stream', async () => {
      const bytes = Uint8Array.from({ length: 70_000 }, (_, i) => i % 251);
      await blobs.put('derived/c/one', bytes);
      expect(Buffer.compare(await blobs.bytes('derived/c/one'), bytes)).toBe(0);
      const streamed = new Uint8Array(await new Response(await blobs.get('derived/c/one')).arrayBuffer());
      expect(Buffer.compare(streamed, bytes)).toBe(0);
    });

    it('puts a stream, with its length or without', async () => {
      await blobs.put('derived/c/with', streamOf('ab', 'cd'), 4);
      await blobs.put('derived/c/without', streamOf('ef', 'gh'));
      expect(new TextDecoder().decode(await blobs.bytes('derived/c/with'))).toBe('abcd');
      expect(new TextDecoder().decode(await blobs.bytes('derived/c/without'))).toBe('efgh');
    });

    it('keeps an empty blob', async () => {
      await blobs.put('derived/c/empty', new Uint8Array(0));
      expect(await blobs.bytes('derived/c/empty')).toHaveLength(0);
      expect(await blobs.has('derived/c/empty')).toBe(true);
    });

    it('keeps nothing of a body with another length, or of a stream that breaks', async () => {
      await expect(blobs.put('derived/c/short', streamOf('abc'), 5)).rejects.toThrow();
      await expect(blobs.put('derived/c/short', bytesOf('abc'), 5)).rejects.toThrow(RangeError);
      const breaking = new ReadableStream<Uint8Array>({
        pull(controller) {
          controller.enqueue(bytesOf('begun'));
          controller.error(new Error('the sender went away'));
        },
      });
      await expect(blobs.put('derived/c/short', breaking)).rejects.toThrow('the sender went away');
      expect(await blobs.has('derived/c/short')).toBe(false);
    });

    it('replaces a blob under the same key', async () => {
      await blobs.put('derived/c/twice', bytesOf('first'));
      await blobs.put('derived/c/twice', bytesOf('second'));
      expect(new TextDecoder().decode(await blobs.bytes('derived/c/twice'))).toBe('second');
    });

    it('says that a blob is missing', async () => {
      expect(await blobs.has('derived/c/none')).toBe(false);
      await expect(blobs.bytes('derived/c/none')).rejects.toThrow(BlobMissing);
      await expect(blobs.get('derived/c/none')).rejects.toThrow(BlobMissing);
      await blobs.delete('derived/c/none');
    });

    it('lists what begins with a prefix, and no longer what was deleted', async () => {
      await blobs.put('originals/x/1', bytesOf('1'));
      await blobs.put('originals/x/2', bytesOf('22'));
      await blobs.put('originals/xy/3', bytesOf('3'));
      await blobs.delete('originals/x/1');
      const found: [string, number][] = [];
      for await (const { key, size } of blobs.list('originals/x/')) found.push([key, size]);
      expect(found).toEqual([['originals/x/2', 2]]);
    });
  });
});

describe('file-blobs', () => {
  it('refuse a key that leaves their folder', async () => {
    const blobs = createFileBlobs(join(tmpdir(), 'never-made'));
    for (const key of ['../x/y', 'a/../b', '/a/b', 'a//b', 'single', 'a/b\0']) {
      await expect(blobs.has(key)).rejects.toThrow(/blob key/);
    }
  });

  it('leave no part behind when a put fails', async () => {
    const folder = await mkdtemp(join(tmpdir(), 'ratespan-test-'));
    const blobs = createFileBlobs(folder);
    await expect(blobs.put('derived/c/short', streamOf('abc'), 5)).rejects.toThrow();
    expect(await readdir(join(folder, 'parts'))).toEqual([]);
    await rm(folder, { recursive: true, force: true });
  });
});
