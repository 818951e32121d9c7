import { sql } from 'drizzle-orm';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { Statement } from './fence.ts';
import { insertRows, json } from './statement.ts';

/** Each step that gives parameters has a range of positions of its own, so that within an event its rows follow those of the steps before. */
export const PARAMETER_PARTS = { fit: 0, judge: 1_000_000, forecast: 2_000_000 } as const;
const PART_SIZE = 1_000_000;

/** Rows of one statement: full ones have one text, which stays prepared. */
const ROWS_A_STATEMENT = 50;

/** Puts the parameters that one step found for a sample in the place of its older ones. */
export function replaceParameters(
  db: LibSQLDatabase,
  campaignId: string,
  sample: string,
  part: keyof typeof PARAMETER_PARTS,
  rows: readonly ParameterRow[],
): Statement[] {
  const from = PARAMETER_PARTS[part];
  const statements: Statement[] = [
    db.run(sql`
      delete from parameters where campaign_id = ${campaignId} and sample = ${sample}
        and position >= ${from} and position < ${from + PART_SIZE}`),
  ];
  for (let at = 0; at < rows.length; at += ROWS_A_STATEMENT) {
    const some = rows.slice(at, at + ROWS_A_STATEMENT);
    statements.push(
      insertRows(
        'parameters',
        COLUMNS,
        some.map((row, i) => valuesOf(campaignId, from + at + i, row)),
      ),
    );
  }
  return statements;
}

const COLUMNS =
  'campaign_id, sample, position, event, quantity, method, conversion, temperature_k, value, unit, lower95, upper95, scan_count, rate_min_k_per_s, rate_max_k_per_s, flags, interval, variant';

const valuesOf = (campaignId: string, position: number, row: ParameterRow) => [
  campaignId,
  row.sample,
  position,
  row.event,
  row.quantity,
  row.method,
  row.conversion,
  row.temperature_K,
  row.value,
  row.unit,
  row.lower95,
  row.upper95,
  row.scan_count,
  row.rate_min_K_per_s,
  row.rate_max_K_per_s,
  json(row.flags),
  row.interval,
  row.variant,
];
