import { sql } from 'drizzle-orm';
import { check, index, integer, primaryKey, real, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';

/** Times are ms since the epoch. Ids are random, prefixed by kind. JSON columns hold types of schema/wire. */

export const campaigns = sqliteTable(
  'campaigns',
  {
    id: text('id').primaryKey(),
    lab: text('lab').notNull(),
    name: text('name').notNull(),
    createdAt: integer('created_at').notNull(),
    /** Grows with every change of anything the campaign shows: ETags and the event stream use it. */
    revision: integer('revision').notNull().default(0),
  },
  (t) => [uniqueIndex('campaigns_name').on(t.lab, t.name)],
);

/** One uploaded file or archive member under one path; a path sent again with other bytes makes the older row superseded. */
export const files = sqliteTable(
  'files',
  {
    id: text('id').primaryKey(),
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    path: text('path').notNull(),
    sha256: text('sha256').notNull(),
    bytes: integer('bytes').notNull(),
    blobKey: text('blob_key').notNull(),
    kind: text('kind').notNull(), // data | sheet | archive
    archiveId: text('archive_id'), // the archive this member came from
    superseded: integer('superseded', { mode: 'boolean' }).notNull().default(false),
    /** unread → read | refused (data), expanded (archive), parsed (sheet) */
    state: text('state').notNull(),
    reason: text('reason'),
    refusalCode: text('refusal_code'),
    /** derived columns blob once read */
    columnsKey: text('columns_key'),
    flags: text('flags', { mode: 'json' }).notNull().default([]),
    createdAt: integer('created_at').notNull(),
  },
  (t) => [index('files_path').on(t.campaignId, t.path), index('files_hash').on(t.campaignId, t.sha256)],
);

/** Parsed sheet rows as they stand now; `body` is the wire type of the sheet. */
export const sheetRows = sqliteTable(
  'sheet_rows',
  {
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    sheet: text('sheet').notNull(), // scans | instruments | samples
    line: integer('line').notNull(),
    body: text('body', { mode: 'json' }).notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.sheet, t.line] })],
);

/** A scan: (file bytes, sample, instrument, segment) in a campaign; a file that no row names is one `unassigned` scan. */
export const scans = sqliteTable(
  'scans',
  {
    id: text('id').primaryKey(),
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    fileId: text('file_id')
      .notNull()
      .references(() => files.id, { onDelete: 'cascade' }),
    sha256: text('sha256').notNull(),
    sample: text('sample'),
    instrument: text('instrument'),
    role: text('role').notNull().default('sample'),
    segment: integer('segment'), // as asked by the sheet; the analysed one is in `result`
    /** ScanSheetRow or null when assigned by folder */
    sheetRow: text('sheet_row', { mode: 'json' }),
    status: text('status').notNull(),
    reason: text('reason'),
    reducedKey: text('reduced_key'),
    /** ReducedScan without curves: characteristic temperatures, segments, for the tables */
    result: text('result', { mode: 'json' }),
    flags: text('flags', { mode: 'json' }).notNull().default([]),
    updatedAt: integer('updated_at').notNull(),
  },
  (t) => [index('scans_campaign').on(t.campaignId, t.sample, t.status), index('scans_file').on(t.fileId)],
);

export const samples = sqliteTable(
  'samples',
  {
    id: text('id').primaryKey(),
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    sample: text('sample').notNull(),
    state: text('state').notNull(),
    reason: text('reason'),
    /** hash of the inputs of the stored fit */
    fitKey: text('fit_key'),
    reports: text('reports', { mode: 'json' }).notNull().default([]),
  },
  (t) => [uniqueIndex('samples_name').on(t.campaignId, t.sample)],
);

export const instruments = sqliteTable(
  'instruments',
  {
    id: text('id').primaryKey(),
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    instrument: text('instrument').notNull(),
    /** InstrumentCalibration */
    calibration: text('calibration', { mode: 'json' }).notNull(),
  },
  (t) => [uniqueIndex('instruments_name').on(t.campaignId, t.instrument)],
);

export const parameters = sqliteTable(
  'parameters',
  {
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    sample: text('sample').notNull(),
    position: integer('position').notNull(), // order within the sample
    event: integer('event').notNull(),
    quantity: text('quantity').notNull(),
    method: text('method').notNull(),
    conversion: real('conversion'),
    temperatureK: real('temperature_k'),
    value: real('value').notNull(),
    unit: text('unit').notNull(),
    lower95: real('lower95'),
    upper95: real('upper95'),
    scanCount: integer('scan_count').notNull(),
    rateMinKPerS: real('rate_min_k_per_s').notNull(),
    rateMaxKPerS: real('rate_max_k_per_s').notNull(),
    flags: text('flags', { mode: 'json' }).notNull(),
    interval: text('interval').notNull(),
    variant: text('variant').notNull(),
  },
  (t) => [
    primaryKey({ columns: [t.campaignId, t.sample, t.position] }),
    index('parameters_quantity').on(t.campaignId, t.quantity, t.method),
  ],
);

/** Flags of fits, sheets and planning; flags of a file or scan live on their rows. */
export const flags = sqliteTable(
  'flags',
  {
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    /** which step wrote it, so that the step replaces its own: fit:SAMPLE, sheet:NAME, plan */
    source: text('source').notNull(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.source, t.position] })],
);

/** Coverage and gap rows of the last plan. */
export const plans = sqliteTable('plans', {
  campaignId: text('campaign_id')
    .primaryKey()
    .references(() => campaigns.id, { onDelete: 'cascade' }),
  coverage: text('coverage', { mode: 'json' }).notNull(),
  gaps: text('gaps', { mode: 'json' }).notNull(),
});

/** The job row is the record; a queue message is a wake-up holding its id. */
export const jobs = sqliteTable(
  'jobs',
  {
    id: text('id').primaryKey(),
    campaignId: text('campaign_id')
      .notNull()
      .references(() => campaigns.id, { onDelete: 'cascade' }),
    step: text('step').notNull(),
    /** what the step works on: a file, scan, sample or campaign id */
    subject: text('subject').notNull(),
    state: text('state').notNull(),
    attempts: integer('attempts').notNull().default(0),
    /** lease: who, until when, and a generation that only grows; every write-back checks it */
    generation: integer('generation').notNull().default(0),
    leasedBy: text('leased_by'),
    leasedUntil: integer('leased_until'),
    nextTryAt: integer('next_try_at').notNull(),
    lastError: text('last_error'),
    createdAt: integer('created_at').notNull(),
    finishedAt: integer('finished_at'),
  },
  (t) => [
    index('jobs_due').on(t.state, t.nextTryAt),
    // at most one waiting job for the same work: a burst of uploads makes one refit
    uniqueIndex('jobs_one_waiting').on(t.step, t.subject).where(sql`state = 'queued'`),
    index('jobs_campaign').on(t.campaignId, t.state),
  ],
);

/** A guarded batch inserts changes() here: a late worker's batch fails whole on the check (STACK, last paragraph). */
export const fence = sqliteTable('fence', { ok: integer('ok').notNull() }, (t) => [
  check('fence_ok', sql`${t.ok} = 1`),
]);
