import { decodeColumns, encodeColumns } from '../../schema/wire/columns.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import { BlobMissing, type Ports } from '../ports/index.ts';

/** Columns kept in memory between reading and reducing, bytes. */
const KEPT_BYTES = 48e6;

export function encodeReadScan({ timeS, temperatureK, heatFlow, ...meta }: ReadScan): Uint8Array {
  return encodeColumns({ meta, columns: { timeS, temperatureK, heatFlow } });
}

export function decodeReadScan(bytes: Uint8Array): ReadScan {
  const { meta, columns } = decodeColumns(bytes);
  return { ...(meta as Omit<ReadScan, 'timeS' | 'temperatureK' | 'heatFlow'>), ...columns } as ReadScan;
}

/** Columns just read, on their way to the reduction in the same process: saves reading them back. A blob holds them anyway. */
export class ColumnsCache {
  readonly #kept = new Map<string, ReadScan>();
  #bytes = 0;

  keep(key: string, scan: ReadScan): void {
    this.take(key);
    this.#kept.set(key, scan);
    this.#bytes += sizeOf(scan);
    for (const oldest of this.#kept.keys()) {
      if (this.#bytes <= KEPT_BYTES) break;
      this.take(oldest);
    }
  }

  /** Gives the columns away: the receiver may hand their memory to another thread. */
  take(key: string): ReadScan | undefined {
    const scan = this.#kept.get(key);
    if (scan) {
      this.#kept.delete(key);
      this.#bytes -= sizeOf(scan);
    }
    return scan;
  }
}

const sizeOf = (scan: ReadScan) => 3 * scan.timeS.byteLength;

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
