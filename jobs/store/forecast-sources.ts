import { eq } from 'drizzle-orm';
import { samples } from '../../schema/tables/index.ts';
import { decodeForecastSource } from '../../schema/wire/forecast-blob.ts';
import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { decodePacked } from '../../schema/wire/packed-blob.ts';
import { BlobMissing, type Ports } from '../ports/index.ts';

/** Blob of what the forecasts of one event rest on. */
export const forecastSourceKey = (campaignId: string, forecastKey: string, event: number): string =>
  `derived/${campaignId}/source-${forecastKey}-${event}`;

/** Blob of the forecasts of a sample; it names the events that have a source. */
export const forecastBlobKey = (campaignId: string, forecastKey: string): string =>
  `derived/${campaignId}/forecast-${forecastKey}`;

/** What forecasts of a sample on request are answered from, by event; nothing where it has no forecast (yet). */
export async function readForecastSources(ports: Ports, sampleId: string): Promise<ForecastSource[]> {
  const [sample] = await ports.database.read
    .select({ campaignId: samples.campaignId, forecastKey: samples.forecastKey })
    .from(samples)
    .where(eq(samples.id, sampleId));
  if (!sample?.forecastKey) return [];
  const { campaignId, forecastKey } = sample;
  const stored = await ports.blobs.bytes(forecastBlobKey(campaignId, forecastKey)).catch((error) => {
    if (error instanceof BlobMissing) return undefined;
    throw error;
  });
  if (!stored) return [];
  const { events } = decodePacked<{ events: number[] }>(stored);
  const sources = await Promise.all(
    events.map(async (event) =>
      decodeForecastSource(await ports.blobs.bytes(forecastSourceKey(campaignId, forecastKey, event))),
    ),
  );
  return sources.sort((a, b) => a.event - b.event);
}
