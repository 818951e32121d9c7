import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import type { FlagRow } from '../client/rows.ts';
import type { ReportSample } from './data.ts';

/** Samples told with figures in one report at most: some 100 pages of print; more make a file that is slow to open. */
export const FIGURED_SAMPLES = 100;

const GRAVITY: Record<FlagRow['severity'], number> = { stop: 1e6, warn: 1, note: 0 };

/**
 * Samples that the report tells with their figures: all of them up to FIGURED_SAMPLES, else that many of the flagged ones, the gravest
 * first: by flags that stop a result, then by a verdict other than one straight law, then by warnings; equal ones in their order.
 */
export function figuredSamples(
  samples: readonly ReportSample[],
  flags: readonly FlagRow[],
  verdicts: readonly VerdictRow[],
): Set<string> {
  if (samples.length <= FIGURED_SAMPLES) return new Set(samples.map(({ sample }) => sample));
  const gravity = new Map<string, number>();
  const add = (sample: string | null, weight: number): void => {
    if (sample !== null) gravity.set(sample, (gravity.get(sample) ?? 0) + weight);
  };
  for (const { sample, severity } of flags) add(sample, GRAVITY[severity]);
  for (const { sample, verdict } of verdicts) add(sample, verdict === 'straight' ? 0 : 1000);
  const flagged = samples.map(({ sample }) => sample).filter((sample) => (gravity.get(sample) ?? 0) > 0);
  flagged.sort((a, b) => (gravity.get(b) ?? 0) - (gravity.get(a) ?? 0));
  return new Set(flagged.slice(0, FIGURED_SAMPLES));
}
