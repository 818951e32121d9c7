import { and, eq, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { files, instruments, scans } from '../../schema/tables/index.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Ports } from '../ports/index.ts';
import type { Statement } from './fence.ts';
import { queueReductions, touchSamples } from './job-rows.ts';

export type InstrumentRow = typeof instruments.$inferSelect;

export async function loadInstrument(
  ports: Ports,
  instrumentId: string,
): Promise<{ instrument: InstrumentRow; highestRateKPerS: number } | undefined> {
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
  return { instrument, highestRateKPerS: highest ?? 0 };
}

/** Stores a calibration; where it is another than before, every scan that it corrects is reduced again. */
export function saveCalibration(
  db: LibSQLDatabase,
  row: InstrumentRow,
  now: number,
  found: { calibration: InstrumentCalibration; highestRateKPerS: number; changed: boolean },
): Statement[] {
  const { calibration, highestRateKPerS, changed } = found;
  const corrected = sql`campaign_id = ${row.campaignId} and instrument = ${row.instrument} and disposition = 'assigned'
    and status in ('read', 'reduced', 'set_aside', 'failed')
    and file_id in (select id from files where campaign_id = ${row.campaignId} and state = 'read' and superseded = 0)`;
  return [
    db
      .update(instruments)
      .set({ calibration, highestRateKPerS, calibratedRevision: row.inputsRevision })
      .where(eq(instruments.id, row.id)),
    ...(changed
      ? [
          touchSamples(db, row.campaignId, sql`select sample from scans where ${corrected} and role = 'sample'`),
          db.run(
            sql`update scans set status = 'read', reason = null, inputs_revision = inputs_revision + 1 where ${corrected}`,
          ),
        ]
      : []),
    ...queueReductions(db, row.campaignId, now, { instrument: row.instrument }),
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
    touchSamples(db, campaignId, sql`select sample from scans where ${waiting}`),
    db.run(sql`update scans set status = 'failed', reason = ${reason} where ${waiting}`),
  ];
}
