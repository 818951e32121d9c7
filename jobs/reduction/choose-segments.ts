import type { Segment } from '../../schema/wire/reduced.ts';

/**
 * The segments to look at, in order, or why the one asked for cannot be used. By default the heating ones, then holds that follow a
 * heating (isothermal scans); cooling only when the sheet names it.
 */
export function chooseSegments(
  segments: Segment[],
  asked: number | undefined,
): { candidates: Segment[] } | { reason: string; action: string } {
  const list = segments.map((s) => `${s.segment} ${s.kind}`).join(', ');
  if (asked !== undefined) {
    const s = segments[asked - 1];
    if (!s) {
      return {
        reason: `segment ${asked} was asked for, but the file has ${segments.length}: ${list}`,
        action: 'Correct the segment column of scans.csv.',
      };
    }
    return { candidates: [s] };
  }
  const heating = segments.filter((s) => s.kind === 'heating');
  const holds = segments.filter((s, i) => s.kind === 'hold' && i > 0 && segments[i - 1].kind !== 'hold');
  const candidates = [...heating, ...holds];
  if (candidates.length === 0) {
    return {
      reason: `the file holds no heating segment (it has ${list})`,
      action: 'Check the temperature column, or name the segment in scans.csv.',
    };
  }
  return { candidates };
}
