import type { ReduceOutcome } from '../../schema/wire/reduced.ts';
import { decodeReduceOutcome } from '../../schema/wire/reduced-blob.ts';
import { BlobMissing, type Ports } from '../ports/index.ts';
import { queueReductions, touchSamples } from './job-rows.ts';
import { wakeCampaign } from './leases.ts';
import { runBatch, text } from './statement.ts';

/** The reduced curves that a row names are missing or damaged, as after a power cut: they have to be made again. */
export class ReducedLost extends Error {
  constructor(readonly key: string) {
    super(`the blob ${key} is missing or damaged and is made again`);
    this.name = 'ReducedLost';
  }
}

/** The reduced curves under a key. Throws ReducedLost. */
export async function readReduced(ports: Pick<Ports, 'blobs'>, key: string): Promise<ReduceOutcome> {
  try {
    return decodeReduceOutcome(await ports.blobs.bytes(key));
  } catch (error) {
    if (error instanceof BlobMissing || error instanceof RangeError || error instanceof SyntaxError)
      throw new ReducedLost(key);
    throw error;
  }
}

/** The reduced curves under a key; where they are lost the scan is reduced again and there are none for now. */
export async function readReducedOrRevive(
  ports: Ports,
  campaignId: string,
  key: string,
): Promise<ReduceOutcome | undefined> {
  return readReduced(ports, key).catch(async (error) => {
    if (!(error instanceof ReducedLost)) throw error;
    await reduceAgain(ports, campaignId, key);
    return undefined;
  });
}

/** Scans whose reduced curves are lost are reduced once more, and their samples wait for them. */
export async function reduceAgain(ports: Ports, campaignId: string, reducedKey: string): Promise<void> {
  const now = ports.clock.now();
  const lost = text`campaign_id = ${campaignId} and reduced_key = ${reducedKey} and status = 'reduced'`;
  await ports.database.write((db) =>
    runBatch(db, [
      touchSamples(campaignId, text`select sample from scans where ${lost} and role = 'sample'`),
      text`update scans set status = 'read', inputs_revision = inputs_revision + 1 where ${lost}`,
      ...queueReductions(campaignId, now),
    ]),
  );
  await wakeCampaign(ports, campaignId);
}
