import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { ReducedEvent, ReducedScan, ReduceOutcome, Segment } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import { analyseSegment, findEvents } from './analyse-segment.ts';
import { chooseSegments } from './choose-segments.ts';
import { findDirection } from './direction.ts';
import type { Excursion } from './find-event.ts';
import { subtractReference } from './reference.ts';
import { createContext, type ScanContext } from './scan-context.ts';
import { findSegments } from './segments.ts';
import { bridgeSpikes } from './spikes.ts';
import { reduceStandard } from './standard.ts';
import { makeTrace, rangeOf } from './trace.ts';

export { type EventMatching, type MatchScan, matchEvents } from './match-events.ts';

type Refused = Extract<ReduceOutcome, { ok: false }>;

/**
 * Reduces one scan: segments, direction, the exothermic events of the analysed segment with baseline, conversion grid and characteristic
 * temperatures, with lag, offset and response of the instrument removed.
 * @param scan columns in SI as read   @param input sheet values and the instrument's correction
 * @returns a reduced scan (with `no-event` where there is none), or the reason why it cannot be used
 */
export function reduceScan(scan: ReadScan, input: ReduceInput): ReduceOutcome {
  const { calibration } = input;
  const where = { file: input.file, sample: input.sample, instrument: calibration.instrument };
  const flags: Flag[] = [];
  const segments = findSegments(scan.timeS, scan.temperatureK);
  const refuse = (code: Refused['code'], reason: string, action: string): Refused => ({
    ok: false,
    code,
    reason,
    action,
    flags: [flag(code, sentence(reason), action, where)],
  });

  if (scan.heatFlowUnit === 'V' && calibration.sensitivityVPerW === undefined) {
    return refuse(
      'file-damaged',
      'the signal is a voltage and the instrument has no sensitivity',
      `Give the instrument ${calibration.instrument} a sensitivity [µV/mW] in instruments.csv.`,
    );
  }
  const chosen = chooseSegments(segments, input.segment);
  if ('reason' in chosen) return refuse('file-damaged', chosen.reason, chosen.action);
  if (input.role !== 'sample') {
    const s = chosen.candidates[0];
    const trace = makeTrace(scan.timeS, scan.temperatureK, scan.heatFlow, s.from, s.to, 0);
    const standard = input.role === 'standard' ? standardOf(scan, input, s) : undefined;
    const heatFlowUnit = unitOf(scan);
    const reduced = {
      segments,
      segment: s.segment,
      heatFlowUnit,
      ...(standard && { standard }),
      events: [],
      trace,
      flags,
    };
    return { ok: true, reduced };
  }

  const bridged = bridgeSpikes(scan.heatFlow);
  if (bridged.rows.length > 0) flags.push(spikeFlag(scan, bridged.rows, where));
  let heatFlow = bridged.y;
  if (input.reference) {
    const subtracted = subtractReference(scan, heatFlow, input.reference);
    if ('reason' in subtracted) return refuse('file-damaged', subtracted.reason, subtracted.action);
    heatFlow = subtracted.heatFlow;
  }
  const direction = findDirection(scan, heatFlow, input, chosen.candidates);
  if (!direction.ok) {
    return refuse(
      'sign-unknown',
      direction.reason,
      'Write up or down in the exotherm column of scans.csv for this file.',
    );
  }
  if (direction.flag) flags.push(direction.flag);
  const factor =
    (direction.sign * (calibration.heatFactor ?? 1)) /
    (scan.heatFlowUnit === 'V' ? (calibration.sensitivityVPerW ?? 1) : 1);
  const y = factor === 1 ? heatFlow : heatFlow.map((v) => factor * v);
  const context = createContext(scan, y, input, flags);
  return { ok: true, reduced: reduceChosen(context, segments, chosen.candidates) };
}

/** A voltage is told in W by the instrument's sensitivity. */
const unitOf = ({ heatFlowUnit }: ScanContext['scan']): ReducedScan['heatFlowUnit'] =>
  heatFlowUnit === 'W/kg' ? 'W/kg' : 'W';

function reduceChosen(c: ScanContext, segments: Segment[], candidates: Segment[]): ReducedScan {
  const { scan, y, flags, input } = c;
  const { segment, excursions } = pickSegment(c, candidates);
  const found = analyseSegment(c, segment, segments[segment.segment - 2], excursions);
  if (found.events.length === 0) {
    flags.push(
      flag(
        'no-event',
        `No exotherm stands out of the noise in segment ${segment.segment} (${segment.startK.toFixed(1)} to ${segment.endK.toFixed(1)} K).`,
        'Check the segment and the exotherm direction in scans.csv, or scan further; the scan stays out of the kinetics.',
        c.where,
      ),
    );
  }
  if (segment.kind === 'cooling') {
    flags.push(
      flag(
        'cooling',
        `Segment ${segment.segment} cools at ${Math.abs(segment.rateKPerS).toPrecision(3)} K/s; methods for heating scans leave it out.`,
        'Nothing; Friedman, incremental Vyazovkin and Ozawa 1971 use it.',
        c.where,
      ),
    );
  }
  const massKg = input.massKg ?? massFromEnthalpy(c, found.events);
  const { events, glass, meltingOnsetK } = found;
  const trace = makeTrace(
    scan.timeS,
    scan.temperatureK,
    y,
    segment.from,
    segment.to,
    c.shiftAt(segment.rateKPerS, (segment.startK + segment.endK) / 2),
    found.shown,
    segment.kind === 'hold',
  );
  return {
    segments,
    segment: segment.segment,
    ...(massKg !== undefined && { massKg }),
    heatFlowUnit: unitOf(scan),
    ...(glass && { glassTransitionK: glass.midpointK, glassTransitionOnsetK: glass.onsetK }),
    ...(meltingOnsetK !== undefined && { meltingOnsetK }),
    events,
    trace,
    flags,
  };
}

/** A heating segment is passed over where its strongest exotherm is lower than this part of another one's: the kick of a start, say. */
const LEAST_OF_SEGMENTS = 0.1;
/** An exotherm on a hold is higher than this part of the file's whole signal: less is the ripple of the temperature control. */
const LEAST_OF_SIGNAL = 0.002;

/** The first heating segment with an exotherm worth the name, else the first hold with one, else the widest heating. */
function pickSegment(c: ScanContext, candidates: Segment[]): { segment: Segment; excursions: Excursion[] } {
  const heights = (x: Excursion[]) => x.map((e) => e.prominence);
  const ramps = candidates
    .filter((s) => s.kind !== 'hold')
    .map((segment) => ({ segment, excursions: findEvents(c, segment) }));
  const highest = Math.max(0, ...ramps.flatMap((r) => heights(r.excursions)));
  const ramp = ramps.find((r) => highest > 0 && Math.max(0, ...heights(r.excursions)) >= LEAST_OF_SEGMENTS * highest);
  if (ramp) return ramp;
  for (const segment of candidates.filter((s) => s.kind === 'hold')) {
    const excursions = findEvents(c, segment);
    if (excursions.some((e) => e.prominence > LEAST_OF_SIGNAL * rangeOf(c.y))) return { segment, excursions };
  }
  const span = (s: Segment) => Math.abs(s.endK - s.startK);
  return { segment: candidates.reduce((widest, s) => (span(s) > span(widest) ? s : widest)), excursions: [] };
}

/** Mass as heat ÷ reference enthalpy where none was given (an estimate; kinetics never needs it). Tells the user either way. */
function massFromEnthalpy(c: ScanContext, events: ReducedEvent[]): number | undefined {
  if (c.scan.heatFlowUnit === 'W/kg' || events.length === 0) return undefined;
  const enthalpy = c.input.crystallizationEnthalpyJPerKg;
  const whole = events.filter((e) => e.curve);
  const massKg =
    enthalpy !== undefined && whole.length > 0 ? whole.reduce((sum, e) => sum + e.area, 0) / enthalpy : undefined;
  c.flags.push(
    flag(
      'mass-unknown',
      massKg === undefined
        ? 'No mass was given, so there is no enthalpy per gram; kinetics does not need it.'
        : `No mass was given; heat ÷ the sheet’s enthalpy of ${((enthalpy ?? 0) / 1e3).toPrecision(4)} J/g makes it ${(massKg * 1e6).toPrecision(3)} mg, an estimate.`,
      'Give the mass in scans.csv if the enthalpy matters.',
      c.where,
    ),
  );
  return massKg;
}

function standardOf(scan: ReadScan, input: ReduceInput, segment: Segment) {
  const { y } = bridgeSpikes(scan.heatFlow);
  const perWatt = scan.heatFlowUnit === 'V' ? (input.calibration.sensitivityVPerW ?? 1) : 1;
  const said = input.exotherm ?? scan.exotherm;
  return reduceStandard(scan, perWatt === 1 ? y : y.map((v) => v / perWatt), segment, said && said === 'up');
}

function spikeFlag(scan: ReadScan, rows: number[], where: object): Flag {
  const times = rows.slice(0, 3).map((i) => `${scan.timeS[i].toPrecision(5)} s`);
  const more = rows.length > 3 ? ' …' : '';
  return flag(
    'spike',
    `${rows.length} single-point ${rows.length === 1 ? 'spike was' : 'spikes were'} bridged, at ${times.join(', ')}${more}.`,
    'Nothing, unless there are many: then look at the cables and the purge.',
    where,
  );
}

const sentence = (text: string): string => `${text[0].toUpperCase()}${text.slice(1)}.`;
