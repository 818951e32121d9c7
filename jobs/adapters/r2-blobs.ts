import type { R2Bucket } from '@cloudflare/workers-types';
import { BlobMissing, type BlobStore } from '../ports/index.ts';

/** Only the serverless runtime has this stream; it tells the bucket the length that `put` needs to know beforehand. */
declare const FixedLengthStream: (new (length: number) => TransformStream<Uint8Array, Uint8Array>) | undefined;

/** Blobs in an object bucket. A `put` is whole or absent by the bucket's own promise. */
export function createBucketBlobs(bucket: R2Bucket): BlobStore {
  const found = async (key: string) => {
    const object = await bucket.get(key);
    if (!object) throw new BlobMissing(key);
    return object;
  };
  return {
    async put(key, body, length) {
      if (body instanceof Uint8Array) {
        checkLength(key, body.byteLength, length);
        await bucket.put(key, body);
      } else if (length !== undefined && typeof FixedLengthStream !== 'undefined') {
        const fixed = new FixedLengthStream(length);
        // Both ends are awaited: a body of another length fails the pipe, and the bucket then keeps nothing.
        await Promise.all([body.pipeTo(fixed.writable), bucket.put(key, fixed.readable as never)]);
      } else {
        const bytes = new Uint8Array(await new Response(body).arrayBuffer());
        checkLength(key, bytes.byteLength, length);
        await bucket.put(key, bytes);
      }
    },
    get: async (key) => (await found(key)).body as unknown as ReadableStream<Uint8Array>,
    bytes: async (key) => new Uint8Array(await (await found(key)).arrayBuffer()),
    has: async (key) => (await bucket.head(key)) !== null,
    delete: (key) => bucket.delete(key),
    async *list(prefix) {
      let cursor: string | undefined;
      do {
        const page = await bucket.list({ prefix, cursor });
        for (const { key, size, uploaded } of page.objects) yield { key, size, modifiedMs: uploaded.getTime() };
        cursor = page.truncated ? page.cursor : undefined;
      } while (cursor);
    },
  };
}

function checkLength(key: string, size: number, length: number | undefined): void {
  if (length !== undefined && size !== length) {
    throw new RangeError(`blob ${key}: ${size} bytes came, ${length} were announced`);
  }
}
