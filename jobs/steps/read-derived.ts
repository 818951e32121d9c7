import { BlobMissing, type Ports } from '../ports/index.ts';

/** A derived blob, or undefined where it is missing or damaged: it is then made again from its inputs. */
export async function readDerived<T>(
  ports: Ports,
  key: string,
  decode: (bytes: Uint8Array) => T,
): Promise<T | undefined> {
  try {
    return decode(await ports.blobs.bytes(key));
  } catch (error) {
    if (error instanceof BlobMissing || error instanceof RangeError || error instanceof SyntaxError) return undefined;
    throw error;
  }
}
