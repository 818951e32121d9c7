import { and, eq } from 'drizzle-orm';
import { files, flags, scans } from '../../../schema/tables/index.ts';
import type { Flag } from '../../../schema/wire/flags.ts';
import type { Ports } from '../../ports/index.ts';
import { readEndedCorrections } from '../correction-rows.ts';
import { canonicalJson } from '../ids.ts';
import type { ResultRow } from './result-row.ts';
import { compareCells, eventNumberOf } from './scan-table.ts';

const SEVERITY_ORDER = { stop: 0, warn: 1, note: 2 } as const;

/**
 * Flags of files, scans, sheets and fits, most severe first, then by code, sample, instrument, file and event.
 * Those of superseded files are left out; the same flag from two scans of one file is one row.
 */
export async function readFlagTable(ports: Pick<Ports, 'database'>, campaignId: string): Promise<ResultRow[]> {
  const { read } = ports.database;
  const live = eq(files.superseded, false);
  const ofFiles = await read
    .select({ found: files.flags })
    .from(files)
    .where(and(eq(files.campaignId, campaignId), live));
  const ofScans = await read
    .select({
      found: scans.flags,
      sample: scans.sample,
      instrument: scans.instrument,
      file: files.path,
      result: scans.result,
      eventNumbers: scans.eventNumbers,
    })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(and(eq(scans.campaignId, campaignId), live));
  const ofSteps = await read.select({ body: flags.body }).from(flags).where(eq(flags.campaignId, campaignId));
  const all: Flag[] = [
    ...ofFiles.flatMap((row) => row.found),
    ...ofScans.flatMap(({ found, sample, instrument, file, ...scan }) =>
      found.map((f) => ({
        ...f,
        event: f.event === undefined ? undefined : eventNumberOf(scan, f.event),
        sample: f.sample ?? sample ?? undefined,
        instrument: f.instrument ?? instrument ?? undefined,
        file: f.file ?? file,
      })),
    ),
    ...ofSteps.map((row) => row.body),
    ...(await readEndedCorrections(ports, campaignId)),
  ];
  const distinct = [...new Map(all.map((f) => [canonicalJson(f), f])).values()];
  const rows = distinct.map(({ severity, code, sample, instrument, file, event, detail, action }) => ({
    severity,
    code,
    sample: sample ?? null,
    instrument: instrument ?? null,
    file: file ?? null,
    event: event ?? null,
    detail,
    action,
  }));
  return rows.sort(
    (a, b) =>
      SEVERITY_ORDER[a.severity] - SEVERITY_ORDER[b.severity] ||
      compareCells(a.code, b.code) ||
      compareCells(a.sample, b.sample) ||
      compareCells(a.instrument, b.instrument) ||
      compareCells(a.file, b.file) ||
      compareCells(a.event, b.event) ||
      compareCells(a.detail, b.detail),
  );
}
