import type { Ports } from '../ports/index.ts';
import { listInputs } from '../store/index.ts';
import { readSampleSeeds } from './fit-sample.ts';
import { FIT_DRAWS, STEP_VERSIONS } from './settings.ts';

/** What the results of a campaign were made from and with, so that they can be made again. */
export interface Provenance {
  stepVersions: Readonly<Record<string, number>>;
  /** Draws of the Monte Carlo behind each interval */
  draws: number;
  /** Seed of each sample's draws, hex */
  seeds: Readonly<Record<string, string>>;
  /** Every input with its SHA-256, hex, by path */
  inputs: readonly { file: string; sha256: string }[];
}

export const answerProvenance = async (ports: Ports, campaignId: string): Promise<Provenance> => ({
  stepVersions: STEP_VERSIONS,
  draws: FIT_DRAWS,
  seeds: await readSampleSeeds(ports, campaignId),
  inputs: await listInputs(ports, campaignId),
});
