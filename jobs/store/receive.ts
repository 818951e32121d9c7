import { createHash } from 'node:crypto';
import { quote } from '../../schema/wire/flags.ts';
import type { Ports } from '../ports/index.ts';
import { type ArrivedFile, acceptFile, type FileReceipt } from './arrivals.ts';
import { createId, sha256Hex } from './ids.ts';

/** Largest file taken, bytes. */
export const FILE_LIMIT_BYTES = 100e6;
/** Bodies up to this size are hashed before anything is stored, so that known bytes are never written. */
const HELD_IN_MEMORY_BYTES = 4e6;

class BodyRefused extends Error {}

/**
 * Takes one file: bytes to the blob store, hashed on the way, then one batch with its rows and job.
 * Refuses only for size, path or name; what the bytes are worth is decided by the jobs.
 * @param length in bytes where known (Content-Length); a body of another length is refused
 * Throws StoreRefusal `campaign-unknown`.
 */
export async function receiveFile(
  ports: Ports,
  campaignId: string,
  path: string,
  body: ReadableStream<Uint8Array> | Uint8Array,
  length?: number,
): Promise<FileReceipt> {
  const refused = async (reason: string): Promise<FileReceipt> => {
    if (!(body instanceof Uint8Array) && !body.locked) await body.cancel().catch(() => undefined);
    return { file: path, outcome: 'refused', reason };
  };
  const problem = ports.paths.problem(path);
  if (problem !== undefined) return refused(`the path ${quote(path)} ${problem}`);
  const announced = body instanceof Uint8Array ? body.byteLength : length;
  if (announced !== undefined && announced > FILE_LIMIT_BYTES) return refused(tooLarge(announced));

  let file: ArrivedFile;
  try {
    const blobKey = `originals/${campaignId}/${createId('blob')}`;
    file = { path, kind: ports.paths.kind(path), blobKey, ...(await takeBody(ports, blobKey, body, announced)) };
  } catch (error) {
    if (error instanceof BodyRefused) return refused(error.message);
    throw error;
  }
  return acceptFile(ports, campaignId, file);
}

const tooLarge = (bytes: number) =>
  `the file has ${bytes} bytes; the limit is ${FILE_LIMIT_BYTES}: split it or send it compressed`;

/** Hashes the body; a long one is stored on the way, a short one only held. */
async function takeBody(
  ports: Ports,
  blobKey: string,
  body: ReadableStream<Uint8Array> | Uint8Array,
  announced: number | undefined,
): Promise<{ sha256: string; size: number; bytes?: Uint8Array }> {
  if (body instanceof Uint8Array) return { sha256: sha256Hex(body), size: body.byteLength, bytes: body };
  if (announced !== undefined && announced <= HELD_IN_MEMORY_BYTES) {
    const bytes = new Uint8Array(announced);
    let at = 0;
    for await (const chunk of body as unknown as AsyncIterable<Uint8Array>) {
      if (at + chunk.byteLength > announced)
        throw new BodyRefused(`more than the announced ${announced} bytes came: send it again`);
      bytes.set(chunk, at);
      at += chunk.byteLength;
    }
    if (at !== announced) throw new BodyRefused(`${at} bytes came of the announced ${announced}: send it again`);
    return { sha256: sha256Hex(bytes), size: at, bytes };
  }
  const hash = createHash('sha256');
  let size = 0;
  const meter = new TransformStream<Uint8Array, Uint8Array>({
    transform(chunk, controller) {
      size += chunk.byteLength;
      if (size > (announced ?? FILE_LIMIT_BYTES)) {
        throw new BodyRefused(
          announced === undefined ? tooLarge(size) : `more than the announced ${announced} bytes came: send it again`,
        );
      }
      hash.update(chunk);
      controller.enqueue(chunk);
    },
    flush() {
      if (announced !== undefined && size !== announced) {
        throw new BodyRefused(`${size} bytes came of the announced ${announced}: send it again`);
      }
    },
  });
  await ports.blobs.put(blobKey, body.pipeThrough(meter), announced);
  return { sha256: hash.digest('hex'), size };
}
