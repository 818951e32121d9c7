import { CONVERSION_GRID } from '../../../schema/wire/reduced.ts';
import type { Ports } from '../../ports/index.ts';
import { readReducedOrRevive } from '../lost-blobs.ts';
import type { ResultRow } from './result-row.ts';
import { eventNumberOf, readScanRecords } from './scan-table.ts';

/** The reduced curves on the conversion grid, in the order of scans.csv; one scan's blob is in memory at a time. */
export async function* readConversionTable(
  ports: Ports,
  campaignId: string,
  sample?: string,
): AsyncGenerator<ResultRow> {
  for await (const scan of readScanRecords(ports, campaignId, sample)) {
    if (scan.status !== 'reduced' || scan.reducedKey === null) continue;
    const outcome = await readReducedOrRevive(ports, campaignId, scan.reducedKey);
    if (!outcome?.ok) continue;
    const { segment, events } = outcome.reduced;
    for (const { event, curve } of events) {
      if (!curve) continue;
      for (let i = 0; i < curve.timeS.length; i++) {
        yield {
          file: scan.path,
          segment,
          sample: scan.sample,
          instrument: scan.instrument,
          event: eventNumberOf(scan, event),
          conversion: CONVERSION_GRID[i],
          time_s: curve.timeS[i],
          temperature_K: curve.temperatureK[i],
          rate_per_s: curve.ratePerS[i],
        };
      }
    }
  }
}
