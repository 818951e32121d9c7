import { sendRandomRequests } from '../api/random-requests.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable } from './table.ts';

/** Random requests of every role, drawn from the OpenAPI document and held to it. */
export async function requestsStudy({ count = 100_000, seed }: StudyOptions): Promise<string> {
  const { requests, failureCount, failures, troubles, byStatus, byActor, documented, met } = await sendRandomRequests(
    count,
    seed,
  );
  const seen = [...documented].filter((pair) => met.has(pair));
  const missing = [...documented].filter((pair) => !met.has(pair));
  return [
    `${requests} requests; ${failureCount} answers with an undocumented status, media type, code or shape, or from 500 on; ${troubles.length} failures in the log.`,
    ...failures.map((failure) => `- ${failure}`),
    markdownTable(
      ['status', 'answers'],
      [...byStatus].sort(([a], [b]) => a - b),
    ),
    markdownTable(['asked by', 'requests'], [...byActor]),
    `Documented pairs of route and status below 500: ${documented.size}; met: ${seen.length}. Not met: ${missing.join(', ') || 'none'}.`,
  ].join('\n\n');
}
