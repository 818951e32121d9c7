import { index, integer, primaryKey, real, sqliteTable, text } from 'drizzle-orm/sqlite-core';
import type { CoverageRow, GapRow } from '../wire/campaign.ts';
import type { Flag } from '../wire/flags.ts';
import type { AdviceRow, ForecastRow, GoalRow } from '../wire/forecasts.ts';
import type { ParameterRow } from '../wire/parameters.ts';
import type { VerdictRow } from '../wire/verdicts.ts';
import { campaignId, campaigns } from './campaigns.ts';

/** What the steps found, in the order in which the result files show it. */

export const parameters = sqliteTable(
  'parameters',
  {
    campaignId: campaignId(),
    sample: text('sample').notNull(),
    /** Order within the event; each step has a range of its own, see jobs/store/parameter-rows.ts. */
    position: integer('position').notNull(),
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
    flags: text('flags', { mode: 'json' }).$type<ParameterRow['flags']>().notNull(),
    interval: text('interval').$type<ParameterRow['interval']>().notNull(),
    variant: text('variant').$type<ParameterRow['variant']>().notNull(),
  },
  (t) => [
    primaryKey({ columns: [t.campaignId, t.sample, t.position] }),
    index('parameters_quantity').on(t.campaignId, t.quantity, t.method),
  ],
);

/** One row an event. */
export const verdicts = sqliteTable(
  'verdicts',
  {
    campaignId: campaignId(),
    sample: text('sample').notNull(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).$type<VerdictRow>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.sample, t.position] })],
);

export const forecasts = sqliteTable(
  'forecasts',
  {
    campaignId: campaignId(),
    sample: text('sample').notNull(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).$type<ForecastRow>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.sample, t.position] })],
);

/** Goals set through the API; those of goal.csv are sheet rows. */
export const goals = sqliteTable(
  'goals',
  {
    campaignId: campaignId(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).$type<GoalRow>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.position] })],
);

/** Flags of fits, sheets and assignment; flags of a file or scan live on their rows. */
export const flags = sqliteTable(
  'flags',
  {
    campaignId: campaignId(),
    /** Which step wrote it, so that the step replaces its own: `fit:SAMPLE`, `assign`. */
    source: text('source').notNull(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).$type<Flag>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.source, t.position] })],
);

/** Scans that would narrow a sample's intervals most. */
export const advice = sqliteTable(
  'advice',
  {
    campaignId: campaignId(),
    sample: text('sample').notNull(),
    position: integer('position').notNull(),
    body: text('body', { mode: 'json' }).$type<AdviceRow>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.campaignId, t.sample, t.position] })],
);

/** Coverage and gap rows of the last plan. */
export const plans = sqliteTable('plans', {
  campaignId: text('campaign_id')
    .primaryKey()
    .references(() => campaigns.id, { onDelete: 'cascade' }),
  coverage: text('coverage', { mode: 'json' }).$type<CoverageRow[]>().notNull(),
  gaps: text('gaps', { mode: 'json' }).$type<GapRow[]>().notNull(),
});
