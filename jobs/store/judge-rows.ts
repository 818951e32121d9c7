import { eq, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { samples } from '../../schema/tables/index.ts';
import { decodePacked } from '../../schema/wire/packed-blob.ts';
import type { SampleForecastResult } from '../../schema/wire/sample-forecast.ts';
import type { JudgeResult, PlotCurve } from '../../schema/wire/verdicts.ts';
import type { Ports } from '../ports/index.ts';
import { replaceFlags } from './assignment-rows.ts';
import type { Statement } from './fence.ts';
import type { SampleRow } from './fit-rows.ts';
import { createId } from './ids.ts';
import { insertJob } from './job-rows.ts';
import { replaceParameters } from './parameter-rows.ts';
import { insertRows, json } from './statement.ts';

const ROWS_A_STATEMENT = 50;

/** Rows kept whole as JSON, one list a sample. `table` is part of the text, never from outside. */
function replaceBodies(
  db: LibSQLDatabase,
  table: 'verdicts' | 'forecasts' | 'advice',
  { campaignId, sample }: SampleRow,
  rows: readonly object[],
): Statement[] {
  const statements: Statement[] = [
    db.run(sql`delete from ${sql.raw(table)} where campaign_id = ${campaignId} and sample = ${sample}`),
  ];
  for (let at = 0; at < rows.length; at += ROWS_A_STATEMENT) {
    const values = rows.slice(at, at + ROWS_A_STATEMENT).map((body, i) => [campaignId, sample, at + i, json(body)]);
    statements.push(insertRows(table, 'campaign_id, sample, position, body', values));
  }
  return statements;
}

/** Replaces the verdicts of a sample, with the parameters and flags that came with them. */
export function saveJudgement(
  db: LibSQLDatabase,
  sample: SampleRow,
  judgeKey: string,
  found: JudgeResult,
): Statement[] {
  const { campaignId, sample: name } = sample;
  return [
    ...replaceBodies(db, 'verdicts', sample, found.verdicts),
    ...replaceParameters(db, campaignId, name, 'judge', found.parameters),
    ...replaceFlags(db, campaignId, `judge:${name}`, found.flags),
    db.update(samples).set({ judgeKey }).where(eq(samples.id, sample.id)),
  ];
}

/** Replaces the forecasts and the advice of a sample. */
export function saveForecasts(
  db: LibSQLDatabase,
  sample: SampleRow,
  forecastKey: string,
  found: Omit<SampleForecastResult, 'sources'>,
): Statement[] {
  const { campaignId, sample: name } = sample;
  return [
    ...replaceBodies(db, 'forecasts', sample, found.forecasts),
    ...replaceBodies(db, 'advice', sample, found.advice),
    ...replaceParameters(db, campaignId, name, 'forecast', found.parameters),
    ...replaceFlags(db, campaignId, `forecast:${name}`, found.flags),
    db.update(samples).set({ forecastKey }).where(eq(samples.id, sample.id)),
  ];
}

/** Blob of everything behind the verdicts of a sample. */
export const judgementKey = (campaignId: string, judgeKey: string): string => `derived/${campaignId}/judge-${judgeKey}`;

/** Everything behind the verdicts of a sample, event by event; nothing where it has none (yet). */
export async function readSamplePlots(
  ports: Pick<Ports, 'database' | 'blobs'>,
  sampleId: string,
): Promise<{ event: number; plots: PlotCurve[] }[]> {
  const [sample] = await ports.database.read
    .select({ campaignId: samples.campaignId, judgeKey: samples.judgeKey })
    .from(samples)
    .where(eq(samples.id, sampleId));
  if (!sample?.judgeKey) return [];
  const bytes = await ports.blobs.bytes(judgementKey(sample.campaignId, sample.judgeKey));
  return decodePacked<JudgeResult>(bytes).events.map(({ row, plots }) => ({ event: row.event, plots }));
}

/** Queues the step that follows for one sample. */
export const queueNext = (
  { campaignId, id }: SampleRow,
  step: 'judge-curvature' | 'forecast-sample',
  now: number,
): Statement => insertJob({ id: createId('job'), campaignId, step, subject: id, now });
