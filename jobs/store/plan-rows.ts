import { and, asc, eq } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { instruments, plans, samples, scans } from '../../schema/tables/index.ts';
import type { CoverageRow, GapRow } from '../../schema/wire/campaign.ts';
import type { PeakSheetRow } from '../../schema/wire/forecasts.ts';
import type { ReducedSummary } from '../../schema/wire/reduced-blob.ts';
import type { InstrumentCalibration, SampleSheetRow, ScanSheetRow } from '../../schema/wire/scan.ts';
import type { Role } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import { loadSheetRows } from './assignment-rows.ts';
import type { Statement } from './fence.ts';

export interface PlanRows {
  /** Names of the samples that scans or samples.csv name. */
  samples: string[];
  scans: {
    sample: string;
    instrument: string;
    role: Role;
    sheetRow: ScanSheetRow | null;
    result: ReducedSummary | null;
  }[];
  /** Rows of peaks.csv. */
  peaks: PeakSheetRow[];
  calibrations: InstrumentCalibration[];
}

/** Reduced scans of a campaign, with what the plan needs of samples and instruments. */
export async function loadPlan(ports: Ports, campaignId: string): Promise<PlanRows> {
  const { read } = ports.database;
  const named = await read.select({ sample: samples.sample }).from(samples).where(eq(samples.campaignId, campaignId));
  const inSheet = await loadSheetRows<SampleSheetRow>(ports, campaignId, 'samples');
  const reduced = await read
    .select({
      sample: scans.sample,
      instrument: scans.instrument,
      role: scans.role,
      sheetRow: scans.sheetRow,
      result: scans.result,
    })
    .from(scans)
    .where(and(eq(scans.campaignId, campaignId), eq(scans.status, 'reduced')));
  const calibrated = await read
    .select({ calibration: instruments.calibration })
    .from(instruments)
    .where(eq(instruments.campaignId, campaignId))
    .orderBy(asc(instruments.instrument));
  return {
    samples: [...new Set([...named, ...inSheet].map((row) => row.sample))],
    scans: reduced as PlanRows['scans'],
    peaks: await loadSheetRows<PeakSheetRow>(ports, campaignId, 'peaks'),
    calibrations: calibrated.flatMap((row) => row.calibration ?? []),
  };
}

export const savePlan = (
  db: LibSQLDatabase,
  campaignId: string,
  { coverage, gaps }: { coverage: CoverageRow[]; gaps: GapRow[] },
): Statement =>
  db
    .insert(plans)
    .values({ campaignId, coverage, gaps })
    .onConflictDoUpdate({ target: plans.campaignId, set: { coverage, gaps } });
