import { calibrationFromSheet } from '../calibration/index.ts';
import type { Ports } from '../ports/index.ts';
import { canonicalJson } from '../store/ids.ts';
import { loadInstrument, saveCalibration } from '../store/instrument-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';

/** Step `calibrate-instrument`: the correction that every scan of an instrument gets; another one than before sends its scans back to reduction. */
export async function calibrateInstrument(ports: Ports, job: ClaimedJob): Promise<void> {
  const rows = await loadInstrument(ports, job.subject);
  if (!rows) return completeJob(ports, job);
  const { instrument, highestRateKPerS } = rows;
  const calibration = calibrationFromSheet(instrument.instrument, instrument.sheetRow ?? undefined, highestRateKPerS);
  const changed = canonicalJson(calibration) !== canonicalJson(instrument.calibration);
  await completeJob(ports, job, (db, now) =>
    saveCalibration(db, instrument, now, { calibration, highestRateKPerS, changed }),
  );
}
