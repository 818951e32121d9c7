import type { Observer, Ports } from '../ports/index.ts';
import { sweepOrphanBlobs } from '../store/orphan-blobs.ts';
import { sweepReplies } from '../store/replies.ts';

const EVERY_MS = 3_600_000;
/** A start has better things to do first. */
const FIRST_MS = 60_000;

/** Deletes what nothing names any more: orphaned blobs, and kept answers whose day is over. */
export async function keepHouse(ports: Ports, observer?: Observer): Promise<void> {
  await sweepReplies(ports).catch((error) => observer?.trouble('kept answers were not swept', error));
  await sweepOrphanBlobs(ports).catch((error) => observer?.trouble('orphaned blobs were not swept', error));
}

/** Keeps house every hour until the signal. Each process may: what one deleted the others do not find. */
export async function keepHouseHourly(ports: Ports, signal: AbortSignal, observer?: Observer): Promise<void> {
  for (let wait = FIRST_MS; !signal.aborted; wait = EVERY_MS) {
    await ports.clock.sleep(wait, signal);
    if (!signal.aborted) await keepHouse(ports, observer);
  }
}
