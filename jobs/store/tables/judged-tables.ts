import { and, asc, eq } from 'drizzle-orm';
import { forecasts, verdicts } from '../../../schema/tables/index.ts';
import type { Ports } from '../../ports/index.ts';
import type { ResultRow } from './result-row.ts';

/** One row an event, by sample and event. */
export async function readVerdictTable(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  sample?: string,
): Promise<ResultRow[]> {
  const rows = await ports.database.read
    .select({ body: verdicts.body })
    .from(verdicts)
    .where(and(eq(verdicts.campaignId, campaignId), sample === undefined ? undefined : eq(verdicts.sample, sample)))
    .orderBy(asc(verdicts.sample), asc(verdicts.position));
  return rows.map(({ body }) => ({ ...body }));
}

/** By sample, then as the forecasts were made. */
export async function readForecastTable(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  sample?: string,
): Promise<ResultRow[]> {
  const rows = await ports.database.read
    .select({ body: forecasts.body })
    .from(forecasts)
    .where(and(eq(forecasts.campaignId, campaignId), sample === undefined ? undefined : eq(forecasts.sample, sample)))
    .orderBy(asc(forecasts.sample), asc(forecasts.position));
  return rows.map(({ body }) => ({ ...body }));
}
