import type { Ports } from '../ports/index.ts';

export interface RunnerOptions {
  /** Jobs in flight at once; workers + 1 keeps worker threads busy. */
  concurrency: number;
  /** Names this process in leases. */
  owner: string;
}

export interface Runner {
  /** Runs until nothing is queued or running (in the campaign, or at all). */
  drain(campaignId?: string): Promise<void>;
  /** Takes jobs until stopped. */
  start(): void;
  /** Takes no more jobs, waits for those in flight. */
  stop(): Promise<void>;
}

export function createRunner(_ports: Ports, _options: RunnerOptions): Runner {
  throw new Error('not written yet');
}
