import { createHash } from 'node:crypto';
import { calibrationFromSheet } from '../../jobs/calibration/index.ts';
import { readInstrumentsSheet, readSamplesSheet, readScan, readScansSheet } from '../../jobs/instrument/index.ts';
import { fitSample } from '../../jobs/kinetics/index.ts';
import { reduceScan } from '../../jobs/reduction/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { FitResult, FitScan } from '../../schema/wire/parameters.ts';
import type { ReducedScan } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration, ScanSheetRow } from '../../schema/wire/scan.ts';

/** What became of one scan of a campaign folder. */
export interface ScanResult {
  row: ScanSheetRow;
  sha256: string;
  dialect?: string;
  reduced?: ReducedScan;
  /** Why there is none */
  reason?: string;
}

export interface ReducedCampaign {
  scans: ScanResult[];
  calibrations: InstrumentCalibration[];
  sheetFlags: Flag[];
}

const hashOf = (bytes: Uint8Array | string): string => createHash('sha256').update(bytes).digest('hex');

/** The product's own way from a folder's bytes to reduced scans, without its store and queue. */
export function reduceCampaign(files: ReadonlyMap<string, Uint8Array>): ReducedCampaign {
  const sheet = <T>(name: string, read: (bytes: Uint8Array, file: string) => { rows: T[]; flags: Flag[] }) => {
    const bytes = files.get(name);
    return bytes ? read(bytes, name) : { rows: [] as T[], flags: [] as Flag[] };
  };
  const scanSheet = sheet('scans.csv', readScansSheet);
  const instrumentSheet = sheet('instruments.csv', readInstrumentsSheet);
  const sampleSheet = sheet('samples.csv', readSamplesSheet);
  const highest = new Map<string, number>();
  for (const row of scanSheet.rows)
    highest.set(row.instrument, Math.max(highest.get(row.instrument) ?? 0, row.rateKPerS ?? 0));
  const calibrations = [...highest].map(([instrument, rate]) =>
    calibrationFromSheet(
      instrument,
      instrumentSheet.rows.find((row) => row.instrument === instrument),
      rate,
    ),
  );
  const scans = scanSheet.rows.map((row): ScanResult => {
    const bytes = files.get(row.file);
    if (!bytes) return { row, sha256: '', reason: 'the file is missing' };
    const sha256 = hashOf(bytes);
    const read = readScan(bytes, row.file);
    if (!read.ok) return { row, sha256, reason: `${read.refusal.code}: ${read.refusal.reason}` };
    const sample = sampleSheet.rows.find((candidate) => candidate.sample === row.sample);
    const outcome = reduceScan(read.scan, {
      file: row.file,
      sample: row.sample,
      role: row.role,
      rateNominalKPerS: row.rateKPerS,
      massKg: row.massKg,
      exotherm: row.exotherm ?? read.scan.exotherm,
      segment: row.segment,
      calibration: calibrations.find(({ instrument }) => instrument === row.instrument)!,
      meltingK: sample?.meltingK,
      crystallizationEnthalpyJPerKg: sample?.crystallizationEnthalpyJPerKg,
    });
    const { dialect } = read.scan;
    if (!outcome.ok) return { row, sha256, dialect, reason: `${outcome.code}: ${outcome.reason}` };
    return { row, sha256, dialect, reduced: outcome.reduced };
  });
  return { scans, calibrations, sheetFlags: [scanSheet, instrumentSheet, sampleSheet].flatMap(({ flags }) => flags) };
}

/** Fits one sample of a reduced campaign. Point estimates do not depend on `draws`. */
export function fitReducedSample(campaign: ReducedCampaign, sample: string, draws: number): FitResult {
  const scans = campaign.scans
    .filter(({ row, reduced }) => row.sample === sample && reduced)
    .flatMap(({ row, sha256, reduced }): FitScan[] =>
      reduced!.events.map((event) => ({
        file: row.file,
        sha256,
        segment: reduced!.segment,
        instrument: row.instrument,
        replicate: row.replicate,
        event,
      })),
    );
  return fitSample({
    sample,
    scans,
    instruments: campaign.calibrations,
    seed: hashOf(
      scans
        .map(({ sha256 }) => sha256)
        .sort()
        .join(),
    ),
    draws,
  });
}
