import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { ReducedEvent, ReduceOutcome, Segment } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import { findDirection } from './direction.ts';
import { type Excursion, findExcursions } from './find-event.ts';
import { reduceEvent } from './reduce-event.ts';
import { findSegments } from './segments.ts';
import { makeTrace } from './trace.ts';

/** A second excursion of at least this part of the first is told to the user: only the strongest event is analysed. */
const SECOND_EVENT_PART = 0.25;

/**
 * Reduces one scan: segments, direction, the strongest exothermic event of the analysed heating segment, baseline, conversion grid and
 * characteristic temperatures, with lag, offset and response of the instrument removed (METHODS 3 and 4).
 * @param scan columns in SI as read   @param input sheet values and the instrument's correction
 * @returns a reduced scan (with `no-event` where there is none), or the reason why it cannot be used
 */
export function reduceScan(scan: ReadScan, input: ReduceInput): ReduceOutcome {
  const { calibration } = input;
  const where = { file: input.file, sample: input.sample, instrument: calibration.instrument };
  const flags: Flag[] = [];
  const segments = findSegments(scan.timeS, scan.temperatureK);

  if (scan.heatFlowUnit === 'V' && calibration.sensitivityVPerW === undefined) {
    return {
      ok: false,
      code: 'file-damaged',
      reason: 'the signal is a voltage and the instrument has no sensitivity',
      action: `Give the instrument ${calibration.instrument} a sensitivity [µV/mW] in instruments.csv.`,
      flags,
    };
  }
  const chosen = chooseSegments(segments, input.segment);
  if ('reason' in chosen) return { ok: false, code: 'file-damaged', ...chosen, flags };
  if (input.role !== 'sample') {
    const s = chosen.candidates[0];
    const trace = makeTrace(scan.timeS, scan.temperatureK, scan.heatFlow, s.from, s.to, 0);
    return { ok: true, reduced: { segments, segment: s.segment, events: [], trace, flags } };
  }

  const direction = findDirection(scan, input, chosen.candidates);
  if (!direction.ok) {
    const action = 'Write up or down in the exotherm column of scans.csv for this file.';
    return {
      ok: false,
      code: 'sign-unknown',
      reason: direction.reason,
      action,
      flags: [flag('sign-unknown', sentence(direction.reason), action, where)],
    };
  }
  if (direction.flag) flags.push(direction.flag);
  const factor = direction.sign / (scan.heatFlowUnit === 'V' ? (calibration.sensitivityVPerW ?? 1) : 1);
  const y = factor === 1 ? scan.heatFlow : scan.heatFlow.map((v) => factor * v);

  let segment: Segment = chosen.candidates[0];
  let excursions: Excursion[] = [];
  for (const s of chosen.candidates) {
    excursions = findExcursions(scan.timeS, y, s.from, s.to);
    segment = s;
    if (excursions.length > 0) break;
  }
  const mass = input.massKg;
  const shiftK = -calibration.offsetK - (calibration.lagS - (calibration.responseS ?? 0)) * segment.rateKPerS;
  if (excursions.length === 0) {
    if (chosen.candidates.length > 0) segment = chosen.candidates[0];
    flags.push(
      flag(
        'no-event',
        `No exotherm stands out of the noise in segment ${segment.segment} (${segment.startK.toFixed(1)} to ${segment.endK.toFixed(1)} K).`,
        'Check the segment and the exotherm direction in scans.csv, or scan further; the scan stays out of the kinetics.',
        where,
      ),
    );
    const trace = makeTrace(scan.timeS, scan.temperatureK, y, segment.from, segment.to, shiftK);
    return {
      ok: true,
      reduced: { segments, segment: segment.segment, ...(mass && { massKg: mass }), events: [], trace, flags },
    };
  }
  if (excursions[1] && excursions[1].prominence > SECOND_EVENT_PART * excursions[0].prominence) {
    flags.push(
      flag(
        'baseline-doubt',
        `A second exotherm of ${Math.round((100 * excursions[1].prominence) / excursions[0].prominence)} % of the strongest was seen; only the strongest event is analysed.`,
        'Look at the thermogram; if the events overlap, treat this scan with care.',
        where,
      ),
    );
  }

  const done = reduceEvent(scan, y, segment, excursions[0], input, flags);
  const events: ReducedEvent[] = done ? [done.event] : [];
  const trace = makeTrace(scan.timeS, scan.temperatureK, y, segment.from, segment.to, shiftK, done?.shown);
  return {
    ok: true,
    reduced: { segments, segment: segment.segment, ...(mass && { massKg: mass }), events, trace, flags },
  };
}

const sentence = (text: string): string => `${text[0].toUpperCase()}${text.slice(1)}.`;

/** The heating segments to look at, in order, or why the one asked for cannot be used. */
function chooseSegments(
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
    if (s.kind !== 'heating') {
      return {
        reason: `segment ${asked} is a ${s.kind} segment; only heating segments are analysed so far (the file has ${list})`,
        action: 'Name a heating segment in scans.csv.',
      };
    }
    return { candidates: [s] };
  }
  const candidates = segments.filter((s) => s.kind === 'heating');
  if (candidates.length === 0) {
    return {
      reason: `the file holds no heating segment (it has ${list})`,
      action: 'Check the temperature column; only heating scans are analysed so far.',
    };
  }
  return { candidates };
}
