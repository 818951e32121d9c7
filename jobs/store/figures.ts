import { JOB_STATES, type JobState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import { allRows, text } from './statement.ts';

export interface JobFigures {
  /** Jobs by state, of all labs together. */
  byState: Record<JobState, number>;
  /** Age of the oldest open job, s; 0 without one. */
  oldestOpenS: number;
}

export async function jobFigures(ports: Ports): Promise<JobFigures> {
  const rows = await allRows<{ state: JobState; count: number; oldest: number }>(
    ports.database.read,
    text`select state, count(*) as count, min(created_at) as oldest from jobs group by state`,
  );
  const byState = Object.fromEntries(JOB_STATES.map((state) => [state, 0])) as Record<JobState, number>;
  for (const { state, count } of rows) byState[state] = count;
  const open = rows.filter(({ state }) => state === 'queued' || state === 'running').map((row) => row.oldest);
  const oldestOpenS = open.length === 0 ? 0 : Math.max(0, (ports.clock.now() - Math.min(...open)) / 1000);
  return { byState, oldestOpenS };
}
