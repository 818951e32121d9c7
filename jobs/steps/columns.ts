import type { ReadOutcome, ReadScan } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import type { DataFile } from '../store/scan-rows.ts';

/** Columns kept in memory between reading and reducing, bytes. */
const KEPT_BYTES = 48e6;

/** Columns just read, on their way to the reduction in the same process: saves reading them twice. */
export class ColumnsCache {
  readonly #kept = new Map<string, ReadScan>();
  #bytes = 0;

  keep(file: DataFile, scan: ReadScan): void {
    this.take(file);
    this.#kept.set(keyOf(file), scan);
    this.#bytes += sizeOf(scan);
    for (const [oldest, kept] of this.#kept) {
      if (this.#bytes <= KEPT_BYTES) break;
      this.#drop(oldest, kept);
    }
  }

  /** Gives the columns away: the receiver may hand their memory to another thread. */
  take(file: DataFile): ReadScan | undefined {
    const scan = this.#kept.get(keyOf(file));
    if (scan) this.#drop(keyOf(file), scan);
    return scan;
  }

  #drop(key: string, scan: ReadScan): void {
    this.#kept.delete(key);
    this.#bytes -= sizeOf(scan);
  }
}

/** The path is in the flags of what was read. */
const keyOf = ({ blobKey, path }: DataFile) => `${blobKey} ${path}`;
const sizeOf = (scan: ReadScan) => 3 * scan.timeS.byteLength;

/**
 * Reads the columns of a file from its original. No copy of them is stored: writing and reading one took longer than reading the
 * text again where a scan is reduced anew.
 */
export const readColumns = async (ports: Ports, { blobKey, path }: DataFile): Promise<ReadOutcome> =>
  ports.compute.readScan(await ports.blobs.bytes(blobKey), path);

/** The columns of a file that was read: from memory, or from the original once more. */
export async function loadColumns(ports: Ports, file: DataFile, cache: ColumnsCache): Promise<ReadScan> {
  const kept = cache.take(file);
  if (kept) return kept;
  const outcome = await readColumns(ports, file);
  if (!outcome.ok) throw new Error(`${file.path} was read before and is refused now: ${outcome.refusal.reason}`);
  return outcome.scan;
}
