import type { Ports } from '../ports/index.ts';
import { queueReductions, touchSamples } from './job-rows.ts';
import { runBatch, text } from './statement.ts';

/** The reduced curves of a scan are lost: it is reduced once more, and its sample waits for it. */
export async function reduceAgain(ports: Ports, campaignId: string, reducedKey: string): Promise<void> {
  const now = ports.clock.now();
  const lost = text`campaign_id = ${campaignId} and reduced_key = ${reducedKey} and status = 'reduced'`;
  await ports.database.write((db) =>
    runBatch(db, [
      touchSamples(db, campaignId, text`select sample from scans where ${lost} and role = 'sample'`),
      text`update scans set status = 'read', inputs_revision = inputs_revision + 1 where ${lost}`,
      ...queueReductions(db, campaignId, now),
    ]),
  );
}
