import { flag } from '../../schema/wire/flags.ts';
import type { ReadOutcome, ReadScan } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { hashOf } from '../store/ids.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { type FileRow, loadFile, saveReadFile, saveRefusedFile } from '../store/scan-rows.ts';
import { type ColumnsCache, decodeReadScan, encodeReadScan, readDerived } from './columns-store.ts';
import { highestHeatingRate } from './highest-rate.ts';
import { STEP_VERSIONS } from './settings.ts';

export const columnsKeyOf = ({ campaignId, sha256, path }: FileRow): string =>
  `derived/${campaignId}/columns-${hashOf(['read-scan', STEP_VERSIONS['read-scan'], sha256, path])}`;

/** Step `read-scan`: the bytes of a data file to columns, kept as a blob, or the file set aside with the reason. */
export async function readScanFile(ports: Ports, job: ClaimedJob, cache: ColumnsCache): Promise<void> {
  const file = await loadFile(ports, job.subject);
  if (file?.state !== 'unread') return completeJob(ports, job);
  const columnsKey = columnsKeyOf(file);
  const outcome = await readOrLookUp(ports, file, columnsKey);
  if (!outcome.ok) {
    const { code, reason, action } = outcome.refusal;
    const flags = [flag(code, reason, action, { file: file.path })];
    return completeJob(ports, job, (db) => saveRefusedFile(db, file, reason, flags), {
      instruments: true,
      samples: true,
    });
  }
  const { scan } = outcome;
  const highestRateKPerS = highestHeatingRate(scan.timeS, scan.temperatureK);
  cache.keep(columnsKey, scan);
  await completeJob(
    ports,
    job,
    (db, now) => saveReadFile(db, file, now, { columnsKey, highestRateKPerS, flags: scan.flags }),
    { instruments: true },
  );
}

async function readOrLookUp(ports: Ports, file: FileRow, columnsKey: string): Promise<ReadOutcome> {
  const stored = await readDerived(ports, columnsKey, decodeReadScan);
  return stored ? { ok: true, scan: stored } : readAndStore(ports, file, columnsKey);
}

async function readAndStore(ports: Ports, file: FileRow, columnsKey: string): Promise<ReadOutcome> {
  const outcome = await ports.compute.readScan(await ports.blobs.bytes(file.blobKey), file.path);
  if (outcome.ok) await ports.blobs.put(columnsKey, encodeReadScan(outcome.scan));
  return outcome;
}

/** The columns of a file that was read: from memory, from their blob, or from the original once more. */
export async function loadColumns(ports: Ports, file: FileRow, cache: ColumnsCache): Promise<ReadScan> {
  const key = file.columnsKey ?? columnsKeyOf(file);
  const kept = cache.take(key);
  if (kept) return kept;
  const outcome = await readOrLookUp(ports, file, key);
  if (!outcome.ok) throw new Error(`${file.path} was read before and is refused now: ${outcome.refusal.reason}`);
  return outcome.scan;
}
