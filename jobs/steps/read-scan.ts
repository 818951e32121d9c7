import { flag } from '../../schema/wire/flags.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { queueReductions } from '../store/job-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import {
  loadFile,
  loadReadyReductions,
  type ReductionRows,
  type ScanToReduce,
  saveReadFile,
  saveReduction,
  saveRefusedFile,
} from '../store/scan-rows.ts';
import { type ColumnsCache, readColumns } from './columns.ts';
import { highestHeatingRate } from './highest-rate.ts';
import { type FoundReduction, reduceRows } from './reduce-scan.ts';

/**
 * Step `read-scan`: the bytes of a data file to columns, or the file set aside with the reason. Scans whose
 * instrument is calibrated already are reduced in the same go, which spares them a job and reading the columns again.
 */
export async function readScanFile(ports: Ports, job: ClaimedJob, cache: ColumnsCache): Promise<void> {
  const file = await loadFile(ports, job.subject);
  if (file?.state !== 'unread') return completeJob(ports, job);
  const outcome = await readColumns(ports, file);
  if (!outcome.ok) {
    const { code, reason, action } = outcome.refusal;
    const flags = [flag(code, reason, action, { file: file.path })];
    const check = { instruments: true, samples: true };
    return completeJob(ports, job, (db) => saveRefusedFile(db, file, reason, flags), check);
  }
  const { scan } = outcome;
  const { flags } = scan;
  const highestRateKPerS = highestHeatingRate(scan.timeS, scan.temperatureK);
  const ready = await loadReadyReductions(ports, file, highestRateKPerS);
  if (ready.length === 0) cache.keep(file, scan);
  const reductions = await reduceAtOnce(ports, ready, scan);
  await completeJob(
    ports,
    job,
    (_db, now) => [
      ...saveReadFile(file, { highestRateKPerS, flags }),
      ...reductions.flatMap((reduction) => saveReduction(reduction.scan, reduction.found)),
      ...queueReductions(file.campaignId, now, { fileId: file.id }),
    ],
    { instruments: true, samples: reductions.length > 0 },
  );
}

/** Gives the columns away where it reduces anything. A reduction that throws is left to a job of its own. */
async function reduceAtOnce(
  ports: Ports,
  ready: readonly ReductionRows[],
  columns: ReadScan,
): Promise<{ scan: ScanToReduce; found: FoundReduction }[]> {
  const reductions: { scan: ScanToReduce; found: FoundReduction }[] = [];
  for (const [i, rows] of ready.entries()) {
    // Each reduction may hand the columns' memory to another thread; all but the last get a copy.
    const given = () => (i === ready.length - 1 ? columns : structuredClone(columns));
    const found = await reduceRows(ports, rows, given).catch(() => undefined);
    if (found) reductions.push({ scan: rows.scan, found });
  }
  return reductions;
}
