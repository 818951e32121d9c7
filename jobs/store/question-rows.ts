import { and, asc, eq } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { campaigns, files, goals, instruments, sheetRows } from '../../schema/tables/index.ts';
import type { GoalRow, ViscositySheetRow } from '../../schema/wire/forecasts.ts';
import type { InstrumentCalibration, SampleSheetRow } from '../../schema/wire/scan.ts';
import type { InstrumentRange } from '../../schema/wire/verdicts.ts';
import type { Ports } from '../ports/index.ts';
import { loadSheetRows } from './assignment-rows.ts';
import { runBatch, type Statement } from './fence.ts';
import { queueJudgements, touchCampaign } from './job-rows.ts';
import { wakeCampaign } from './leases.ts';

/** Instruments of a campaign by name: the calibrated ones, and what each can run where its sheet says so. */
export async function loadBench(
  ports: Ports,
  campaignId: string,
): Promise<{ instruments: InstrumentCalibration[]; ranges: InstrumentRange[] }> {
  const rows = await ports.database.read
    .select({
      instrument: instruments.instrument,
      calibration: instruments.calibration,
      sheetRow: instruments.sheetRow,
    })
    .from(instruments)
    .where(eq(instruments.campaignId, campaignId))
    .orderBy(asc(instruments.instrument));
  return {
    instruments: rows.flatMap((row) => row.calibration ?? []),
    ranges: rows.flatMap(({ instrument, sheetRow }) =>
      sheetRow?.rateMinKPerS === undefined || sheetRow.rateMaxKPerS === undefined
        ? []
        : [{ instrument, rateMinKPerS: sheetRow.rateMinKPerS, rateMaxKPerS: sheetRow.rateMaxKPerS }],
    ),
  };
}

export const loadViscosities = (ports: Ports, campaignId: string, sample?: string): Promise<ViscositySheetRow[]> =>
  loadSheetRows<ViscositySheetRow>(ports, campaignId, 'viscosity', sample);

/** Rows of samples.csv that say where a composition of a series has its glass transition; the first row of a sample counts. */
export async function loadCompositions(
  ports: Ports,
  campaignId: string,
  series?: string,
): Promise<{ series: string; solventFraction: number; glassTransitionK: number }[]> {
  const rows = await loadSheetRows<SampleSheetRow>(ports, campaignId, 'samples');
  const named = new Set<string>();
  return rows.flatMap((row) => {
    if (named.has(row.sample)) return [];
    named.add(row.sample);
    const { solventFraction, glassTransitionK } = row;
    if (row.series === undefined || solventFraction === undefined || glassTransitionK === undefined) return [];
    return series === undefined || series === row.series
      ? [{ series: row.series, solventFraction, glassTransitionK }]
      : [];
  });
}

/** Goals set through the API, then those of goal.csv; of one sample or of all. */
export async function loadGoals(ports: Ports, campaignId: string, sample?: string): Promise<GoalRow[]> {
  const set = await readGoals(ports, campaignId);
  return [
    ...set.filter((goal) => sample === undefined || goal.sample === sample),
    ...(await loadSheetRows<GoalRow>(ports, campaignId, 'goal', sample)),
  ];
}

/** Goals set through the API. */
export async function readGoals(ports: Pick<Ports, 'database'>, campaignId: string): Promise<GoalRow[]> {
  const rows = await ports.database.read
    .select({ body: goals.body })
    .from(goals)
    .where(eq(goals.campaignId, campaignId))
    .orderBy(asc(goals.position));
  return rows.map(({ body }) => body);
}

/** Puts these goals in the place of those set before, and has the forecasts made anew. */
export async function setGoals(ports: Ports, campaignId: string, rows: readonly GoalRow[]): Promise<void> {
  await ports.database.write((db) =>
    runBatch(db, [
      db.delete(goals).where(eq(goals.campaignId, campaignId)),
      ...rows.map((body, position) => db.insert(goals).values({ campaignId, position, body })),
      queueJudgements(campaignId, ports.clock.now()),
      touchCampaign(campaignId, true),
    ]),
  );
  await wakeCampaign(ports, campaignId);
}

/** A temperature programme that was read well. */
export interface ProgramFile {
  path: string;
  sha256: string;
  blobKey: string;
}

export const loadPrograms = (ports: Ports, campaignId: string): Promise<ProgramFile[]> =>
  ports.database.read
    .select({ path: files.path, sha256: files.sha256, blobKey: files.blobKey })
    .from(sheetRows)
    .innerJoin(files, eq(files.id, sheetRows.fileId))
    .where(and(eq(sheetRows.campaignId, campaignId), eq(sheetRows.sheet, 'program')))
    .orderBy(asc(files.path));

export async function loadQuestionsHash(ports: Ports, campaignId: string): Promise<string | undefined> {
  const [row] = await ports.database.read
    .select({ hash: campaigns.questionsHash })
    .from(campaigns)
    .where(eq(campaigns.id, campaignId));
  return row?.hash;
}

/** The questions are others than before: verdicts and forecasts are made anew. */
export const saveQuestions = (db: LibSQLDatabase, campaignId: string, now: number, hash: string): Statement[] => [
  db.update(campaigns).set({ questionsHash: hash }).where(eq(campaigns.id, campaignId)),
  queueJudgements(campaignId, now),
];
