import { and, asc, eq, inArray, sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { campaigns, corrections, files, scanHistory, scans } from '../../schema/tables/index.ts';
import type { CorrectionField, CorrectionValue } from '../../schema/wire/corrections.ts';
import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import type { Ports } from '../ports/index.ts';
import { LOCAL_LAB } from './campaigns.ts';
import { runBatch, type Statement } from './fence.ts';
import { createId } from './ids.ts';
import { insertJob, touchCampaign } from './job-rows.ts';
import { wakeCampaign } from './leases.ts';
import { StoreRefusal } from './refusals.ts';

export type StoredCorrection = typeof corrections.$inferSelect;

export const loadCorrections = (ports: Ports, campaignId: string): Promise<StoredCorrection[]> =>
  ports.database.read
    .select()
    .from(corrections)
    .where(eq(corrections.campaignId, campaignId))
    .orderBy(asc(corrections.sha256), asc(corrections.field), asc(corrections.id));

/** New values by field; null takes a correction back, so that the sheet counts again. */
export type Corrections = Partial<Record<CorrectionField, CorrectionValue>>;

/**
 * Corrects fields of a scan and has the scans assigned anew, which re-queues only what depends on the change.
 * A value that stands already changes nothing. Throws StoreRefusal `scan-unknown` or `scan-superseded`.
 */
export async function correctScan(ports: Ports, scanId: string, changes: Corrections, lab = LOCAL_LAB): Promise<void> {
  const [found] = await ports.database.read
    .select({ scan: scans, sha256: files.sha256, superseded: files.superseded })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .innerJoin(campaigns, eq(campaigns.id, scans.campaignId))
    .where(and(eq(scans.id, scanId), eq(campaigns.lab, lab)));
  if (!found) throw new StoreRefusal('scan-unknown', `there is no scan ${scanId}`);
  if (found.superseded)
    throw new StoreRefusal(
      'scan-superseded',
      `the file of scan ${scanId} was replaced; correct the scan that replaced it`,
    );
  const { scan, sha256 } = found;
  const { campaignId } = scan;
  const said = scan.said ?? {};
  const base = baseOf(said);
  const standing: Record<string, unknown> = scan.sheetRow ?? said;
  const cellOf = (row: Record<string, unknown>, field: CorrectionField) => (row[field] ?? null) as CorrectionValue;
  const now = ports.clock.now();
  const fields = (Object.keys(changes) as CorrectionField[]).sort();
  const changed = fields.flatMap((field) => {
    const before = cellOf(standing, field);
    const after = changes[field] ?? cellOf(said, field);
    return same(before, after) ? [] : [{ field, before, after }];
  });
  if (changed.length === 0) return;
  const here = madeOn(campaignId, sha256, base);
  await ports.database.write((db) =>
    runBatch(db, [
      ...changed.flatMap(({ field, before, after }): Statement[] => [
        db.delete(corrections).where(and(here, eq(corrections.field, field))),
        ...(same(after, cellOf(said, field))
          ? []
          : [
              db.insert(corrections).values({
                id: createId('correction'),
                campaignId,
                sha256,
                ...base,
                field,
                value: after as NonNullable<CorrectionValue>,
                said: cellOf(said, field),
              }),
            ]),
        db.insert(scanHistory).values({ campaignId, scanId, field, before, after, cause: 'correction', at: now }),
      ]),
      insertJob({ id: createId('job'), campaignId, step: 'assign-scans', subject: campaignId, now }),
      touchCampaign(campaignId, true),
    ]),
  );
  await wakeCampaign(ports, campaignId);
}

type Base = Pick<StoredCorrection, 'sample' | 'instrument' | 'segment'>;

const baseOf = ({ sample = null, instrument = null, segment = null }: Partial<Record<keyof Base, unknown>>): Base =>
  ({ sample, instrument, segment }) as Base;

const madeOn = (campaignId: string, sha256: string, { sample, instrument, segment }: Base) =>
  and(
    eq(corrections.campaignId, campaignId),
    eq(corrections.sha256, sha256),
    sql`${corrections.sample} is ${sample} and ${corrections.instrument} is ${instrument} and ${corrections.segment} is ${segment}`,
  );

/** Corrections that stand on a scan. */
export async function standingCorrections(ports: Pick<Ports, 'database'>, scanId: string): Promise<Corrections> {
  const [found] = await ports.database.read
    .select({ campaignId: scans.campaignId, said: scans.said, sha256: files.sha256 })
    .from(scans)
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(eq(scans.id, scanId));
  if (!found) return {};
  const rows = await ports.database.read
    .select({ field: corrections.field, value: corrections.value })
    .from(corrections)
    .where(madeOn(found.campaignId, found.sha256, baseOf(found.said ?? {})))
    .orderBy(asc(corrections.field));
  return Object.fromEntries(rows.map(({ field, value }) => [field, value]));
}

const same = (a: CorrectionValue, b: CorrectionValue): boolean => JSON.stringify(a) === JSON.stringify(b);

/** Takes back corrections that a later sheet ended, and notes it on their scans. */
export function endCorrections(
  db: LibSQLDatabase,
  campaignId: string,
  now: number,
  ended: readonly { correction: StoredCorrection; now: CorrectionValue; scanId?: string }[],
): Statement[] {
  if (ended.length === 0) return [];
  return [
    db.delete(corrections).where(
      inArray(
        corrections.id,
        ended.map(({ correction }) => correction.id),
      ),
    ),
    ...ended.flatMap(({ correction: { field, value }, now: after, scanId }) =>
      scanId === undefined
        ? []
        : [
            db
              .insert(scanHistory)
              .values({ campaignId, scanId, field, before: value, after, cause: 'sheet' as const, at: now }),
          ],
    ),
  ];
}

/** Corrections follow a row that names another sample or instrument. */
export const moveCorrections = (
  db: LibSQLDatabase,
  moved: readonly { id: string; sample: string | null; instrument: string | null }[],
): Statement[] =>
  moved.map(({ id, sample, instrument }) =>
    db.update(corrections).set({ sample, instrument }).where(eq(corrections.id, id)),
  );

export interface HistoryEntry {
  field: CorrectionField;
  before: CorrectionValue;
  after: CorrectionValue;
  cause: 'correction' | 'sheet';
  /** ms since the epoch */
  at: number;
}

/** What was corrected on a scan, oldest first. */
export const readScanHistory = (ports: Ports, scanId: string): Promise<HistoryEntry[]> =>
  ports.database.read
    .select({
      field: scanHistory.field,
      before: scanHistory.before,
      after: scanHistory.after,
      cause: scanHistory.cause,
      at: scanHistory.at,
    })
    .from(scanHistory)
    .where(eq(scanHistory.scanId, scanId))
    .orderBy(asc(scanHistory.position));

/** Names of the fields as scans.csv has them. */
const COLUMN_NAMES: Partial<Record<CorrectionField, string>> = {
  rateKPerS: 'rate',
  massKg: 'mass',
  limitsK: 'limits',
};

/** Flags of corrections that a later sheet has ended, as long as nobody corrected the field again. */
export async function readEndedCorrections(ports: Pick<Ports, 'database'>, campaignId: string): Promise<Flag[]> {
  const rows = await ports.database.read
    .select({
      field: scanHistory.field,
      before: scanHistory.before,
      after: scanHistory.after,
      sample: scans.sample,
      instrument: scans.instrument,
      file: files.path,
    })
    .from(scanHistory)
    .innerJoin(scans, eq(scans.id, scanHistory.scanId))
    .innerJoin(files, eq(files.id, scans.fileId))
    .where(
      and(
        eq(scanHistory.campaignId, campaignId),
        eq(files.superseded, false),
        sql`${scanHistory.cause} = 'sheet' and not exists (
          select 1 from scan_history later where later.scan_id = ${scanHistory.scanId}
            and later.field = ${scanHistory.field} and later.position > ${scanHistory.position})`,
      ),
    );
  const text = (value: CorrectionValue) => (value === null ? 'empty' : quote(String(value)));
  return rows.map(({ field, before, after, sample, instrument, file }) =>
    flag(
      'correction-replaced',
      `The ${COLUMN_NAMES[field] ?? field} of ${quote(file)} had been corrected by hand to ${text(before)}; a later sheet changed that cell to ${text(after)}, and the sheet counts.`,
      'Correct it again if the sheet is wrong.',
      { file, ...(sample !== null && { sample }), ...(instrument !== null && { instrument }) },
    ),
  );
}
