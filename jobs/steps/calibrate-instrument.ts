import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import { calibrateFromStandards, findReferenceSubstance, type StandardObservation } from '../calibration/index.ts';
import type { Ports } from '../ports/index.ts';
import { canonicalJson } from '../store/ids.ts';
import { loadInstrument, type StandardScan, saveCalibration } from '../store/instrument-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';

/**
 * Step `calibrate-instrument`: the correction that every scan of an instrument gets, from its standards, else its sheet row, else
 * the prior; another one than before sends its scans back to reduction.
 */
export async function calibrateInstrument(ports: Ports, job: ClaimedJob): Promise<void> {
  const rows = await loadInstrument(ports, job.subject);
  if (!rows) return completeJob(ports, job);
  const { instrument, highestRateKPerS, standards } = rows;
  const flags: Flag[] = [];
  const observations = standards.flatMap((scan) => observationOf(scan, instrument.instrument, flags));
  const calibration = calibrateFromStandards(
    instrument.instrument,
    instrument.sheetRow ?? undefined,
    highestRateKPerS,
    observations,
  );
  const changed = canonicalJson(calibration) !== canonicalJson(instrument.calibration);
  await completeJob(
    ports,
    job,
    (db, now) => saveCalibration(db, instrument, now, { calibration, highestRateKPerS, changed, flags }),
    { samples: true },
  );
}

/** What a scan of a standard says of its instrument, with what is known of the substance: samples.csv before the built-in list. */
export function observationOf(
  { path, sample, massKg, result, sampleRow }: StandardScan,
  instrument: string,
  flags: Flag[],
): StandardObservation[] {
  const where = { file: path, sample, instrument };
  const substance = findReferenceSubstance(sample);
  const meltingK = sampleRow?.meltingK ?? substance?.meltingK;
  if (meltingK === undefined) {
    flags.push(
      flag(
        'standard-unused',
        `${quote(sample)} stands as a standard, and its melting temperature is not known.`,
        'Name it by element symbol or name, or give it a melting temperature in samples.csv.',
        where,
      ),
    );
    return [];
  }
  const melting = result.standard;
  if (!melting) {
    flags.push(
      flag(
        'standard-unused',
        `No melting stands out of the noise in this scan of ${quote(sample)}, which melts at ${meltingK.toFixed(2)} K.`,
        'Check that the scan passes through the melting point, and its segment in scans.csv.',
        where,
      ),
    );
    return [];
  }
  const enthalpyJPerKg = sampleRow?.meltingEnthalpyJPerKg ?? substance?.enthalpyJPerKg;
  const heatCapacityJPerKgK = sampleRow?.heatCapacityJPerKgK ?? substance?.heatCapacityJPerKgK;
  return [
    {
      melting,
      meltingK,
      ...(enthalpyJPerKg !== undefined && { enthalpyJPerKg }),
      ...(heatCapacityJPerKgK !== undefined && { heatCapacityJPerKgK }),
      ...(massKg !== undefined && { massKg }),
      // A heat flow in W has a thermal resistance with it, one per mass has none.
      perMass: melting.resistanceKPerW === undefined,
    },
  ];
}
