import { eq } from 'drizzle-orm';
import { samples } from '../../schema/tables/index.ts';
import { decodeForecastSource } from '../../schema/wire/forecast-blob.ts';
import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import type { Ports } from '../ports/index.ts';

/** Blob of what the forecasts of one event rest on. */
export const forecastSourceKey = (campaignId: string, forecastKey: string, event: number): string =>
  `derived/${campaignId}/source-${forecastKey}-${event}`;

/** What forecasts of a sample on request are answered from, by event; nothing where it has no forecast (yet). */
export async function readForecastSources(ports: Ports, sampleId: string): Promise<ForecastSource[]> {
  const [sample] = await ports.database.read
    .select({ campaignId: samples.campaignId, forecastKey: samples.forecastKey })
    .from(samples)
    .where(eq(samples.id, sampleId));
  if (!sample?.forecastKey) return [];
  const keys: string[] = [];
  for await (const { key } of ports.blobs.list(
    forecastSourceKey(sample.campaignId, sample.forecastKey, 0).slice(0, -1),
  ))
    keys.push(key);
  const sources = await Promise.all(keys.map(async (key) => decodeForecastSource(await ports.blobs.bytes(key))));
  return sources.sort((a, b) => a.event - b.event);
}
