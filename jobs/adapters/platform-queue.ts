import type { Queue as MessageQueue } from '@cloudflare/workers-types';
import type { Queue } from '../ports/index.ts';

/** A message of the platform queue: only the id; the row is the record. */
export interface WakeMessage {
  jobId: string;
}

/** Longest delay that the platform takes, seconds. */
const LONGEST_DELAY_S = 24 * 3600;

export function createPlatformQueue(messages: MessageQueue<WakeMessage>): Queue {
  return {
    async wake(jobId, delaySeconds) {
      await messages.send({ jobId }, { delaySeconds: Math.min(LONGEST_DELAY_S, Math.ceil(delaySeconds)) });
    },
  };
}
