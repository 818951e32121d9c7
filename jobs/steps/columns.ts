import type { ReadOutcome, ReadScan } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { hashOf } from '../store/ids.ts';
import type { ColumnsSource } from '../store/scan-rows.ts';
import { type ColumnsCache, decodeReadScan, encodeReadScan, readDerived } from './columns-store.ts';
import { STEP_VERSIONS } from './settings.ts';

export const columnsKeyOf = ({ campaignId, sha256, path }: ColumnsSource): string =>
  `derived/${campaignId}/columns-${hashOf(['read-scan', STEP_VERSIONS['read-scan'], sha256, path])}`;

/** The columns of a file: looked up, or read from the original and stored. */
export async function readOrLookUp(ports: Ports, file: ColumnsSource): Promise<ReadOutcome> {
  const key = columnsKeyOf(file);
  const stored = await readDerived(ports, key, decodeReadScan);
  if (stored) return { ok: true, scan: stored };
  const outcome = await ports.compute.readScan(await ports.blobs.bytes(file.blobKey), file.path);
  if (outcome.ok) await ports.blobs.put(key, encodeReadScan(outcome.scan));
  return outcome;
}

/** The columns of a file that was read: from memory, from their blob, or from the original once more. */
export async function loadColumns(ports: Ports, file: ColumnsSource, cache: ColumnsCache): Promise<ReadScan> {
  const kept = cache.take(columnsKeyOf(file));
  if (kept) return kept;
  const outcome = await readOrLookUp(ports, file);
  if (!outcome.ok) throw new Error(`${file.path} was read before and is refused now: ${outcome.refusal.reason}`);
  return outcome.scan;
}
