import type { CampaignStatus, GapRow } from '../../schema/wire/campaign.ts';
import type { Severity } from '../../schema/wire/flags.ts';
import type { FlagRow } from '../client/rows.ts';
import { flagMeaning } from '../words.ts';

/** Flags that say the same and ask for the same. */
export interface FlagGroup {
  code: string;
  severity: Severity;
  meaning: string;
  action: string;
  flags: FlagRow[];
}

/**
 * Flags grouped by code and action, most frequent first within a severity. A flag that repeats a gap of the same sample
 * is left to the list of gaps.
 */
export function groupFlags(flags: readonly FlagRow[], gaps: readonly GapRow[]): Record<Severity, FlagGroup[]> {
  const isGap = new Set(gaps.map((gap) => `${gap.sample}\u0000${gap.code}`));
  const groups = new Map<string, FlagGroup>();
  for (const flag of flags) {
    if (isGap.has(`${flag.sample}\u0000${flag.code}`)) continue;
    const key = `${flag.severity}\u0000${flag.code}\u0000${flag.action}`;
    const group = groups.get(key);
    if (group) group.flags.push(flag);
    else {
      const meaning = flagMeaning(flag.code);
      groups.set(key, { code: flag.code, severity: flag.severity, meaning, action: flag.action, flags: [flag] });
    }
  }
  const sorted = [...groups.values()].sort((a, b) => b.flags.length - a.flags.length);
  return {
    stop: sorted.filter((g) => g.severity === 'stop'),
    warn: sorted.filter((g) => g.severity === 'warn'),
    note: sorted.filter((g) => g.severity === 'note'),
  };
}

/**
 * Gaps and flags that can be told now: what is missing from a sample is not known while its scans still come in, nor is a
 * missing file while jobs run.
 */
export function tellableNow<Flag extends { code: string }>(
  flags: readonly Flag[],
  gaps: readonly GapRow[],
  status: CampaignStatus | undefined,
): { flags: Flag[]; gaps: GapRow[] } {
  const waiting = new Set(status?.samples.filter((s) => s.state === 'waiting').map((s) => s.sample));
  const isSettled = status?.settled ?? false;
  return {
    flags: flags.filter((flag) => isSettled || flag.code !== 'file-missing'),
    gaps: gaps.filter((gap) => isSettled || (gap.sample !== '' && !waiting.has(gap.sample))),
  };
}

/** Gaps grouped by what is missing: the action is often the same for many samples. */
export function groupGaps(gaps: readonly GapRow[]): { code: string; gaps: GapRow[] }[] {
  const groups = new Map<string, GapRow[]>();
  for (const gap of gaps) {
    const same = groups.get(gap.code);
    if (same) same.push(gap);
    else groups.set(gap.code, [gap]);
  }
  return [...groups].map(([code, same]) => ({ code, gaps: same }));
}
