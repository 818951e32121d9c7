import type { InValue } from '@libsql/client';
import { is, type Query, SQL } from 'drizzle-orm';
import type { BatchItem } from 'drizzle-orm/batch';
import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import { SQLiteAsyncDialect } from 'drizzle-orm/sqlite-core';

/**
 * A statement as text with its values, or a piece of one. Put together once per use by joining strings: building every
 * statement of a write-back as a query tree took as long as running it, and the same text finds its prepared statement.
 */
export class SqlText {
  constructor(
    readonly sql: string,
    readonly args: InValue[],
  ) {}
}

/** One statement of a batch. */
export type Statement = SqlText | BatchItem<'sqlite'>;

const dialect = new SQLiteAsyncDialect();

/** `text\`update t set a = ${value} where ${piece}\``: values are bound, pieces (also trees) are put in; undefined is null. */
export function text(strings: TemplateStringsArray, ...values: unknown[]): SqlText {
  let sql = strings[0];
  const args: InValue[] = [];
  for (const [i, value] of values.entries()) {
    if (value instanceof SqlText) {
      sql += value.sql;
      args.push(...value.args);
    } else if (is(value, SQL)) {
      const query = dialect.sqlToQuery(value);
      sql += query.sql;
      args.push(...(query.params as InValue[]));
    } else {
      sql += '?';
      args.push((value ?? null) as InValue);
    }
    sql += strings[i + 1];
  }
  return new SqlText(sql, args);
}

/** A JSON column's value. */
export const json = (value: unknown): string | null =>
  value === null || value === undefined ? null : JSON.stringify(value);

/** One INSERT of many rows; `columns` is part of the text, never from outside. */
export function insertRows(table: string, columns: string, rows: readonly (readonly InValue[])[]): SqlText {
  const places = `(${rows[0].map(() => '?').join(', ')})`;
  return new SqlText(`insert into ${table} (${columns}) values ${rows.map(() => places).join(', ')}`, rows.flat());
}

type WithClient = LibSQLDatabase & {
  $client: {
    execute(statement: { sql: string; args: InValue[] }): Promise<{ rows: unknown[]; rowsAffected: number }>;
    batch(statements: { sql: string; args: InValue[] }[]): Promise<{ rows: unknown[]; rowsAffected: number }[]>;
  };
};

const built = (statement: Statement): { sql: string; args: InValue[] } => {
  if (statement instanceof SqlText) return statement;
  const { sql, params } = (statement as unknown as { _prepare(): { getQuery(): Query } })._prepare().getQuery();
  return { sql, args: params as InValue[] };
};

/** All statements or none. */
export async function runBatch(
  db: LibSQLDatabase,
  statements: readonly Statement[],
): Promise<{ rowsAffected: number }[]> {
  return (db as WithClient).$client.batch(statements.map(built));
}

/** The rows that one statement answers, as they are stored: JSON columns as text, truth values as 0 and 1. */
export async function allRows<T>(db: LibSQLDatabase, statement: SqlText): Promise<T[]> {
  return (await (db as WithClient).$client.execute(statement)).rows as T[];
}

/** A query of the tables that is built once for each database, not at each use. */
export function preparedOnce<Q>(build: (db: LibSQLDatabase) => Q): (db: LibSQLDatabase) => Q {
  const built = new WeakMap<LibSQLDatabase, Q>();
  return (db) => {
    const known = built.get(db);
    if (known) return known;
    const query = build(db);
    built.set(db, query);
    return query;
  };
}
