import type { Segment } from '../../schema/wire/reduced.ts';
import type { SegmentFindings } from './analyse-segment.ts';
import type { Bell } from './excess.ts';
import type { ScanContext } from './scan-context.ts';

export function reduceHold(_c: ScanContext, _segment: Segment, _bells: Bell[]): SegmentFindings {
  return { events: [], shown: [] };
}
