import { sql } from 'drizzle-orm';
import { check, index, integer, primaryKey, real, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import type { CorrectionField, CorrectionValue } from '../wire/corrections.ts';
import type { Flag } from '../wire/flags.ts';
import type { GoalRow, PeakSheetRow, ProgramSheetRow, ViscositySheetRow } from '../wire/forecasts.ts';
import type { FitReport } from '../wire/parameters.ts';
import type { ReducedSummary } from '../wire/reduced-blob.ts';
import type { InstrumentCalibration, InstrumentSheetRow, SampleSheetRow, ScanSheetRow } from '../wire/scan.ts';
import type { JobState, Role, SampleState, ScanState, TokenRole } from '../wire/states.ts';
import { campaignId } from './campaigns.ts';

/**
 * Times are ms since the epoch. Ids are random, prefixed by kind. JSON columns hold types of schema/wire.
 * `inputs_revision` grows with every change of what a row's result depends on; `queued_revision` is the one that a job was
 * queued for last. A job is due where the first is ahead, so no change is forgotten and a burst makes one job.
 */

export { campaigns } from './campaigns.ts';
export * from './results.ts';

export type FileKind = 'data' | 'sheet' | 'archive';
/** unread → read | refused (data), parsed | refused (sheet), expanded | refused (archive); failed when the job gave up. */
export type FileState = 'unread' | 'read' | 'parsed' | 'expanded' | 'refused' | 'failed';
/** What the sheets say of a scan: it has a sample and an instrument, nobody names it, or it repeats the bytes of another. */
export type Disposition = 'waiting' | 'assigned' | 'unassigned' | 'duplicate';
export type ReadSheetName = 'scans' | 'instruments' | 'samples' | 'peaks' | 'viscosity' | 'goal' | 'program';
export type SheetRowBody =
  | ScanSheetRow
  | InstrumentSheetRow
  | SampleSheetRow
  | PeakSheetRow
  | ViscositySheetRow
  | GoalRow
  | ProgramSheetRow;

/** One uploaded file or archive member under one path; a path sent again with other bytes makes the older row superseded. */
export const files = sqliteTable(
  'files',
  {
    id: text('id').primaryKey(),
    campaignId: campaignId(),
    path: text('path').notNull(),
    sha256: text('sha256').notNull(),
    bytes: integer('bytes').notNull(),
    blobKey: text('blob_key').notNull(),
    kind: text('kind').$type<FileKind>().notNull(),
    /** The archive this member came from. */
    archiveId: text('archive_id'),
    superseded: integer('superseded', { mode: 'boolean' }).notNull().default(false),
    state: text('state').$type<FileState>().notNull(),
    reason: text('reason'),
    /** No longer written: it stays for workers of an older version that run beside newer ones. */
    columnsKey: text('columns_key'),
    /** Highest heating rate over the file, K/s, once read: tells a chip from a furnace. */
    highestRateKPerS: real('highest_rate_k_per_s'),
    flags: text('flags', { mode: 'json' }).$type<Flag[]>().notNull().default([]),
    createdAt: integer('created_at').notNull(),
  },
  (t) => [
    uniqueIndex('files_live_path').on(t.campaignId, t.path).where(sql`superseded = 0`),
    index('files_hash').on(t.campaignId, t.sha256),
    index('files_archive').on(t.archiveId),
  ],
);

/** Parsed sheet rows as they stand now; `body` is the wire type of the sheet. */
export const sheetRows = sqliteTable(
  'sheet_rows',
  {
    campaignId: campaignId(),
    fileId: text('file_id')
      .notNull()
      .references(() => files.id, { onDelete: 'cascade' }),
    sheet: text('sheet').$type<ReadSheetName>().notNull(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).$type<SheetRowBody>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.fileId, t.position] }), index('sheet_rows_sheet').on(t.campaignId, t.sheet)],
);

/** A scan: (file bytes, sample, instrument, segment) in a campaign; a file that no row names is one `unassigned` scan. */
export const scans = sqliteTable(
  'scans',
  {
    id: text('id').primaryKey(),
    campaignId: campaignId(),
    fileId: text('file_id')
      .notNull()
      .references(() => files.id, { onDelete: 'cascade' }),
    disposition: text('disposition').$type<Disposition>().notNull(),
    sample: text('sample'),
    instrument: text('instrument'),
    role: text('role').$type<Role>().notNull().default('sample'),
    /** As asked by the sheet; the analysed one is in `result`. */
    segment: integer('segment'),
    /** What the sheet or the folder says of it, before corrections. */
    said: text('said', { mode: 'json' }).$type<Partial<ScanSheetRow>>(),
    /** The row that counts, corrections included. Null when assigned by folder and not corrected. */
    sheetRow: text('sheet_row', { mode: 'json' }).$type<ScanSheetRow>(),
    /** Hash of what the sheets say about this scan: a corrected sheet re-queues only the scans where it changed. */
    sheetHash: text('sheet_hash').notNull().default(''),
    inputsRevision: integer('inputs_revision').notNull().default(1),
    queuedRevision: integer('queued_revision').notNull().default(0),
    status: text('status').$type<ScanState>().notNull(),
    reason: text('reason'),
    reducedKey: text('reduced_key'),
    /** ReducedScan without its curves, for the tables. */
    result: text('result', { mode: 'json' }).$type<ReducedSummary>(),
    /** Numbers of its events over all scans of the sample, in the order of `result.events`; null until the sample is fitted. */
    eventNumbers: text('event_numbers', { mode: 'json' }).$type<number[]>(),
    flags: text('flags', { mode: 'json' }).$type<Flag[]>().notNull().default([]),
  },
  (t) => [
    index('scans_sample').on(t.campaignId, t.sample, t.status),
    index('scans_instrument').on(t.campaignId, t.instrument, t.status),
    index('scans_file').on(t.fileId),
  ],
);

/**
 * Fields of a scan that were corrected by hand and stand over its sheet. A correction belongs to what the sheet says, not to a
 * row's id: to the file's bytes and the sample, instrument and segment named for them, so that it survives a renamed file.
 */
export const corrections = sqliteTable(
  'corrections',
  {
    id: text('id').primaryKey(),
    campaignId: campaignId(),
    sha256: text('sha256').notNull(),
    sample: text('sample'),
    instrument: text('instrument'),
    segment: integer('segment'),
    field: text('field').$type<CorrectionField>().notNull(),
    value: text('value', { mode: 'json' }).$type<CorrectionValue>().notNull(),
    /** The sheet's cell when the correction was made, null where it was empty: another one later ends the correction. */
    said: text('said', { mode: 'json' }).$type<CorrectionValue>(),
  },
  (t) => [index('corrections_campaign').on(t.campaignId, t.sha256)],
);

/** What corrections changed on a scan, oldest first. */
export const scanHistory = sqliteTable(
  'scan_history',
  {
    position: integer('position').primaryKey({ autoIncrement: true }),
    campaignId: campaignId(),
    scanId: text('scan_id').notNull(),
    field: text('field').$type<CorrectionField>().notNull(),
    before: text('before', { mode: 'json' }).$type<CorrectionValue>(),
    after: text('after', { mode: 'json' }).$type<CorrectionValue>(),
    /** A request, or a later sheet whose cell is another. */
    cause: text('cause').$type<'correction' | 'sheet'>().notNull(),
    at: integer('at').notNull(),
  },
  (t) => [index('scan_history_scan').on(t.scanId)],
);

/** Samples that some scan names with the role `sample`, or a row of peaks.csv. */
export const samples = sqliteTable(
  'samples',
  {
    id: text('id').primaryKey(),
    campaignId: campaignId(),
    sample: text('sample').notNull(),
    state: text('state').$type<SampleState>().notNull(),
    reason: text('reason'),
    inputsRevision: integer('inputs_revision').notNull().default(1),
    queuedRevision: integer('queued_revision').notNull().default(0),
    /** Hash of the inputs of the stored fit. */
    fitKey: text('fit_key'),
    reports: text('reports', { mode: 'json' }).$type<FitReport[]>().notNull().default([]),
    /** Hash of the inputs of the stored verdicts, and of the stored forecasts. */
    judgeKey: text('judge_key'),
    forecastKey: text('forecast_key'),
    /** Hash of its rows of peaks.csv. */
    peaksHash: text('peaks_hash').notNull().default(''),
  },
  (t) => [uniqueIndex('samples_name').on(t.campaignId, t.sample), index('samples_state').on(t.campaignId, t.state)],
);

/** Instruments that some scan names. */
export const instruments = sqliteTable(
  'instruments',
  {
    id: text('id').primaryKey(),
    campaignId: campaignId(),
    instrument: text('instrument').notNull(),
    sheetRow: text('sheet_row', { mode: 'json' }).$type<InstrumentSheetRow>(),
    inputsRevision: integer('inputs_revision').notNull().default(1),
    queuedRevision: integer('queued_revision').notNull().default(0),
    /** The revision that `calibration` was made from: scans are reduced only when it is the newest. */
    calibratedRevision: integer('calibrated_revision').notNull().default(0),
    /** Highest heating rate of its scans that `calibration` was made with, K/s. */
    highestRateKPerS: real('highest_rate_k_per_s').notNull().default(0),
    /** Null until calibrated for the first time. */
    calibration: text('calibration', { mode: 'json' }).$type<InstrumentCalibration>(),
  },
  (t) => [uniqueIndex('instruments_name').on(t.campaignId, t.instrument)],
);

/** The job row is the record; a queue message is a wake-up holding its id. */
export const jobs = sqliteTable(
  'jobs',
  {
    id: text('id').primaryKey(),
    campaignId: campaignId(),
    step: text('step').notNull(),
    /** What the step works on: a file, scan, instrument, sample or campaign id. */
    subject: text('subject').notNull(),
    /** Lower runs first. */
    priority: integer('priority').notNull(),
    state: text('state').$type<JobState>().notNull(),
    attempts: integer('attempts').notNull().default(0),
    /** Lease: who, until when, and a generation that only grows; every write-back checks it. */
    generation: integer('generation').notNull().default(0),
    leasedBy: text('leased_by'),
    leasedUntil: integer('leased_until'),
    nextTryAt: integer('next_try_at').notNull(),
    lastError: text('last_error'),
    /** A wake-up was sent for this row since it was queued (platform queue only). */
    woken: integer('woken', { mode: 'boolean' }).notNull().default(false),
    createdAt: integer('created_at').notNull(),
    startedAt: integer('started_at'),
    finishedAt: integer('finished_at'),
  },
  (t) => [
    // with the row id that ends every index entry this is the order of claiming
    index('jobs_due').on(t.state, t.priority),
    // at most one waiting job for the same work: a burst of uploads makes one refit
    uniqueIndex('jobs_one_waiting').on(t.step, t.subject).where(sql`state = 'queued'`),
    index('jobs_running').on(t.step, t.subject).where(sql`state = 'running'`),
    index('jobs_campaign').on(t.campaignId, t.state, t.step),
  ],
);

/** A guarded batch inserts changes() here: a late worker's batch fails whole on the check. The one row 1 stays. */
export const fence = sqliteTable('fence', { ok: integer('ok').primaryKey() }, (t) => [
  check('fence_ok', sql`${t.ok} = 1`),
]);

/** Access tokens of labs. The token itself is shown once and never stored. */
export const tokens = sqliteTable(
  'tokens',
  {
    id: text('id').primaryKey(),
    lab: text('lab').notNull(),
    role: text('role').$type<TokenRole>().notNull(),
    /** SHA-256 of the token, hex: 256 random bits need no slow hash. */
    hash: text('hash').notNull(),
    createdAt: integer('created_at').notNull(),
    expiresAt: integer('expires_at').notNull(),
    revokedAt: integer('revoked_at'),
  },
  (t) => [uniqueIndex('tokens_hash').on(t.hash)],
);

/** Answers to POST requests that named an Idempotency-Key, for a day. */
export const replies = sqliteTable(
  'replies',
  {
    lab: text('lab').notNull(),
    key: text('key').notNull(),
    /** Hash of method, path and body: the key with another request is refused. */
    request: text('request').notNull(),
    /** Null while the first request is still being answered. */
    status: integer('status'),
    contentType: text('content_type'),
    location: text('location'),
    body: text('body'),
    createdAt: integer('created_at').notNull(),
  },
  (t) => [primaryKey({ columns: [t.lab, t.key] }), index('replies_age').on(t.createdAt)],
);

/** The one row names this database; the blob `marker/<id>` says that a blob store belongs to it. */
export const identity = sqliteTable('identity', { one: integer('one').primaryKey(), id: text('id').notNull() }, (t) => [
  check('identity_one', sql`${t.one} = 1`),
]);
