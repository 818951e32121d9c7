import { integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';

export const campaigns = sqliteTable(
  'campaigns',
  {
    id: text('id').primaryKey(),
    lab: text('lab').notNull(),
    name: text('name').notNull(),
    createdAt: integer('created_at').notNull(),
    /** Grows with every change of anything the campaign shows: ETags and the event stream use it. */
    revision: integer('revision').notNull().default(0),
    inputsRevision: integer('inputs_revision').notNull().default(0),
    queuedRevision: integer('queued_revision').notNull().default(0),
    /** Hash of what verdicts and forecasts rest on beside the scans: goals, programmes, viscosities, what the instruments can run. */
    questionsHash: text('questions_hash').notNull().default(''),
  },
  (t) => [uniqueIndex('campaigns_name').on(t.lab, t.name)],
);

/** The column that ties a row to its campaign. */
export const campaignId = () =>
  text('campaign_id')
    .notNull()
    .references(() => campaigns.id, { onDelete: 'cascade' });
