import { decodeColumns, encodeColumns } from './columns.ts';
import type { ReducedCurve, ReducedEvent, ReducedScan, ReduceOutcome } from './reduced.ts';

/** A reduced scan without its curves: what the tables and the database row need. */
export type ReducedSummary = Omit<ReducedScan, 'events' | 'trace' | 'flags'> & {
  events: (Omit<ReducedEvent, 'curve'> & { hasCurve: boolean })[];
};

const CURVE_COLUMNS = [
  'timeS',
  'temperatureK',
  'ratePerS',
  'baselineErrorK',
  'programmeTimeS',
  'programmeTemperatureK',
] as const satisfies readonly (keyof ReducedCurve)[];
const TRACE_COLUMNS = ['temperatureK', 'heatFlow', 'baseline'] as const;

export function summarizeReduced({ events, trace: _trace, flags: _flags, ...head }: ReducedScan): ReducedSummary {
  return { ...head, events: events.map(({ curve, ...event }) => ({ ...event, hasCurve: curve !== undefined })) };
}

/** What `reduce-scan` found, as a column blob: a set-aside scan is kept too, so that a rerun is a look-up. */
export function encodeReduceOutcome(outcome: ReduceOutcome): Uint8Array {
  if (!outcome.ok) return encodeColumns({ meta: outcome, columns: {} });
  const { reduced } = outcome;
  const columns: Record<string, Float64Array> = {};
  for (const name of TRACE_COLUMNS) columns[`trace.${name}`] = reduced.trace[name];
  if (reduced.trace.timeS) columns['trace.timeS'] = reduced.trace.timeS;
  reduced.events.forEach(({ curve }, i) => {
    if (curve) for (const name of CURVE_COLUMNS) columns[`${i}.${name}`] = curve[name];
  });
  return encodeColumns({ meta: { ok: true, summary: summarizeReduced(reduced), flags: reduced.flags }, columns });
}

/** The inverse of `encodeReduceOutcome`. Throws RangeError for bytes that are not such a blob. */
export function decodeReduceOutcome(bytes: Uint8Array): ReduceOutcome {
  const { meta, columns } = decodeColumns(bytes);
  const stored = meta as
    | Extract<ReduceOutcome, { ok: false }>
    | { ok: true; summary: ReducedSummary; flags: ReducedScan['flags'] };
  if (!stored.ok) return stored;
  const { events, ...head } = stored.summary;
  const pick = <K extends string>(prefix: string, names: readonly K[]) =>
    Object.fromEntries(names.map((name) => [name, columns[`${prefix}.${name}`]])) as Record<K, Float64Array>;
  return {
    ok: true,
    reduced: {
      ...head,
      events: events.map(({ hasCurve, ...event }, i) =>
        hasCurve ? { ...event, curve: pick(String(i), CURVE_COLUMNS) } : event,
      ),
      trace: {
        ...pick('trace', TRACE_COLUMNS),
        ...(columns['trace.timeS'] && { timeS: columns['trace.timeS'] }),
      },
      flags: stored.flags,
    },
  };
}
