import type { InstrumentRow } from '../client/rows.ts';
import { formatEstimate } from '../format.ts';

/** Where a correction comes from. */
export const SOURCE_NAMES: Record<InstrumentRow['source'], string> = {
  standards: 'scans of standards',
  sheet: 'instruments.csv',
  prior: 'nothing given: a guess with a wide error',
};

/** Quantile of the normal distribution that leaves 5 % outside both ends. */
export const NORMAL_95 = 1.96;

/** A number with the 95 % interval that its standard error gives; a dash where there is none. */
export function withError(value: number | null, error: number | null, unit: string): string {
  if (value === null) return '–';
  const half = error === null ? null : NORMAL_95 * error;
  const { value: shown, spread } = formatEstimate(
    value,
    half === null ? null : value - half,
    half === null ? null : value + half,
  );
  return [shown, spread, unit].filter(Boolean).join(' ');
}
