import { and, asc, eq, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, instruments, scans } from '../../schema/tables/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import type { ReducedSummary } from '../../schema/wire/reduced-blob.ts';
import type { InstrumentCalibration, SampleSheetRow } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import { loadSheetRows, replaceFlags } from './assignment-rows.ts';
import type { Statement } from './fence.ts';
import { queueJudgements, queueReductions, touchSamples } from './job-rows.ts';

export type InstrumentRow = typeof instruments.$inferSelect;

/** A reduced scan of a standard. */
export interface StandardScan {
  path: string;
  sha256: string;
  sample: string;
  segment: number | null;
  massKg?: number;
  result: ReducedSummary;
  sampleRow: SampleSheetRow | undefined;
}

export async function loadInstrument(
  ports: Ports,
  instrumentId: string,
): Promise<{ instrument: InstrumentRow; highestRateKPerS: number; standards: StandardScan[] } | undefined> {
  const [instrument] = await ports.database.read.select().from(instruments).where(eq(instruments.id, instrumentId));
  if (!instrument) return undefined;
  const [{ highest }] = await ports.database.read
    .select({ highest: sql<number | null>`max(${files.highestRateKPerS})` })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(
      and(
        eq(scans.campaignId, instrument.campaignId),
        eq(scans.instrument, instrument.instrument),
        eq(scans.disposition, 'assigned'),
        eq(files.superseded, false),
      ),
    );
  const [{ inPeaks }] = await ports.database.read.all<{ inPeaks: number | null }>(sql`
    select max(json_extract(body, '$.rateKPerS')) as inPeaks from sheet_rows
    where campaign_id = ${instrument.campaignId} and sheet = 'peaks' and json_extract(body, '$.instrument') = ${instrument.instrument}`);
  const highestRateKPerS = Math.max(highest ?? 0, inPeaks ?? 0);
  return { instrument, highestRateKPerS, standards: await loadStandards(ports, instrument) };
}

/** In the order of their bytes, so that nothing depends on names or on who came first. */
async function loadStandards(ports: Ports, { campaignId, instrument }: InstrumentRow): Promise<StandardScan[]> {
  const rows = await ports.database.read
    .select({
      path: files.path,
      sha256: files.sha256,
      sample: scans.sample,
      segment: scans.segment,
      sheetRow: scans.sheetRow,
      result: scans.result,
    })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(
      and(
        eq(scans.campaignId, campaignId),
        eq(scans.instrument, instrument),
        eq(scans.role, 'standard'),
        eq(scans.status, 'reduced'),
      ),
    )
    .orderBy(asc(files.sha256), asc(scans.segment), asc(scans.sample));
  const sampleRows = rows.length === 0 ? [] : await loadSheetRows<SampleSheetRow>(ports, campaignId, 'samples');
  return rows.flatMap(({ sheetRow, sample, result, ...row }) =>
    sample === null || result === null
      ? []
      : [
          {
            ...row,
            sample,
            result,
            ...(sheetRow?.massKg !== undefined && { massKg: sheetRow.massKg }),
            sampleRow: sampleRows.find((found) => found.sample === sample),
          },
        ],
  );
}

/** Stores a calibration; where it is another than before, every scan that it corrects is reduced again. */
export function saveCalibration(
  db: LibSQLDatabase,
  row: InstrumentRow,
  now: number,
  found: { calibration: InstrumentCalibration; highestRateKPerS: number; changed: boolean; flags: Flag[] },
): Statement[] {
  const { calibration, highestRateKPerS, changed } = found;
  const corrected = sql`campaign_id = ${row.campaignId} and instrument = ${row.instrument} and disposition = 'assigned' and role <> 'standard'
    and status in ('read', 'reduced', 'set_aside', 'failed')
    and file_id in (select id from files where campaign_id = ${row.campaignId} and state = 'read' and superseded = 0)`;
  return [
    db
      .update(instruments)
      .set({ calibration, highestRateKPerS, calibratedRevision: row.inputsRevision })
      .where(eq(instruments.id, row.id)),
    ...replaceFlags(db, row.campaignId, `calibrate:${row.instrument}`, found.flags),
    ...(changed
      ? [
          touchSamples(
            row.campaignId,
            sql`select sample from scans where ${corrected} and role = 'sample'
              union select json_extract(body, '$.sample') from sheet_rows where campaign_id = ${row.campaignId}
                and sheet = 'peaks' and json_extract(body, '$.instrument') = ${row.instrument}`,
          ),
          queueJudgements(row.campaignId, now),
          db.run(
            sql`update scans set status = 'read', reason = null, inputs_revision = inputs_revision + 1 where ${corrected}`,
          ),
        ]
      : []),
    ...queueReductions(row.campaignId, now, { instrument: row.instrument }),
  ];
}

/** The calibration gave up: scans that wait for it fail with it. */
export function saveFailedInstrument(
  db: LibSQLDatabase,
  campaignId: string,
  instrumentId: string,
  reason: string,
): Statement[] {
  const waiting = sql`campaign_id = ${campaignId} and status = 'read'
    and instrument = (select instrument from instruments where id = ${instrumentId})`;
  return [
    touchSamples(campaignId, sql`select sample from scans where ${waiting}`),
    db.run(sql`update scans set status = 'failed', reason = ${reason} where ${waiting}`),
  ];
}
