import type { Client, InArgs, InStatement, ResultSet, Transaction, TransactionMode } from '@libsql/client';
import Connection from 'libsql';

/** Texts of statements kept prepared. The store has about a hundred; a burst of others pushes the oldest out. */
const KEPT_STATEMENTS = 400;

interface Prepared {
  native: Connection.Statement;
  columns: string[];
  /** Answers rows. */
  reads: boolean;
}

/** A row as callers of libSQL know it: columns by name (unless it is a number, as of `select 1`), and by position without being listed. */
class Row {
  readonly #values: readonly unknown[];
  constructor(columns: readonly string[], values: readonly unknown[]) {
    this.#values = values;
    for (let i = columns.length - 1; i >= 0; i--)
      if (!(columns[i] in Row.prototype)) (this as Record<string, unknown>)[columns[i]] = values[i];
  }
  get length(): number {
    return this.#values.length;
  }
  static at(row: Row, position: number): unknown {
    return row.#values[position];
  }
}
for (let i = 0; i < 100; i++)
  Object.defineProperty(Row.prototype, i, {
    get(this: Row) {
      return Row.at(this, i);
    },
  });

const BEGIN: Record<string, string> = { write: 'begin immediate', read: 'begin', deferred: 'begin' };

/**
 * A local database file as a libSQL client, on one connection whose statements stay prepared: preparing each anew took a
 * third of the time of a write-back. What the driver of the tables calls of a client is here, and no more; blobs are not.
 * A statement that failed is prepared anew, since the library may leave it half done.
 */
class FileClient {
  readonly #path: string;
  readonly #busyMs: number;
  readonly #prepared = new Map<string, Prepared>();
  #connection?: Connection.Database;
  closed = false;
  readonly protocol = 'file';

  constructor(path: string, busyMs: number) {
    this.#path = path;
    this.#busyMs = busyMs;
  }

  get #open(): Connection.Database {
    if (this.closed) throw new Error('the database is closed');
    if (!this.#connection) {
      this.#connection = new Connection(this.#path, { timeout: this.#busyMs } as Connection.Options);
      this.#connection.prepare('pragma synchronous = normal').run();
    }
    return this.#connection;
  }

  #prepare(sql: string): Prepared {
    const known = this.#prepared.get(sql);
    if (known) return known;
    const native = this.#open.prepare(sql);
    const reads = native.reader;
    const prepared = { native, reads, columns: reads ? native.columns().map((column) => column.name) : [] };
    if (reads) native.raw(true);
    this.#prepared.set(sql, prepared);
    if (this.#prepared.size > KEPT_STATEMENTS) this.#prepared.delete(this.#prepared.keys().next().value as string);
    return prepared;
  }

  #run(statement: InStatement): ResultSet {
    const { sql, args = [] } = typeof statement === 'string' ? { sql: statement } : statement;
    try {
      const { native, reads, columns } = this.#prepare(sql);
      if (!reads) {
        const { changes, lastInsertRowid } = native.run(bound(args)) as Connection.RunResult;
        return result([], [], changes, BigInt(lastInsertRowid));
      }
      const rows = (native.all(bound(args)) as unknown[][]).map((values) => new Row(columns, values));
      return result(columns, rows, 0, undefined);
    } catch (error) {
      this.#prepared.delete(sql);
      throw error;
    }
  }

  async execute(statement: InStatement, args?: InArgs): Promise<ResultSet> {
    return this.#run(typeof statement === 'string' && args ? { sql: statement, args } : statement);
  }

  /**
   * Starts a transaction by `exec`: where it meets a lock the connection stays sound, which it does not after a prepared
   * statement that met one. The error says so by `beforeStart`.
   */
  #begin(mode: TransactionMode): void {
    try {
      this.#open.exec(BEGIN[mode]);
    } catch (error) {
      throw Object.assign(error as Error, { beforeStart: true });
    }
  }

  async batch(statements: InStatement[], mode: TransactionMode = 'deferred'): Promise<ResultSet[]> {
    this.#begin(mode);
    try {
      const results = statements.map((statement) => this.#run(statement));
      this.#run('commit');
      return results;
    } catch (error) {
      this.#rollBack();
      throw error;
    }
  }

  /** As `batch`, with foreign keys off, as changes of tables need. */
  async migrate(statements: InStatement[]): Promise<ResultSet[]> {
    this.#run('pragma foreign_keys = off');
    try {
      return await this.batch(statements, 'write');
    } finally {
      if (!this.closed) this.#run('pragma foreign_keys = on');
    }
  }

  /** The caller keeps everything else off this connection until the transaction has ended. */
  async transaction(mode: TransactionMode = 'write'): Promise<Transaction> {
    this.#begin(mode);
    const end = async (sql: 'commit' | 'rollback') => {
      if (this.#connection?.inTransaction) this.#run(sql);
    };
    return {
      execute: (statement: InStatement) => this.execute(statement),
      batch: async (statements: InStatement[]) => statements.map((statement) => this.#run(statement)),
      commit: () => end('commit'),
      rollback: () => end('rollback'),
      close: () => void end('rollback'),
    } as Transaction;
  }

  /** A fresh connection: after SQLITE_BUSY the old one loses later writes in silence. */
  async reconnect(): Promise<void> {
    this.#drop();
    this.closed = false;
  }

  close(): void {
    this.#drop();
    this.closed = true;
  }

  #drop(): void {
    this.#prepared.clear();
    const connection = this.#connection;
    this.#connection = undefined;
    if (connection?.open) connection.close();
  }

  #rollBack(): void {
    try {
      if (this.#connection?.inTransaction) this.#run('rollback');
    } catch {
      // Unusable: a fresh one rolls back what this one left.
      this.#drop();
    }
  }
}

/** Values as the library binds them: it knows no truth values. */
const bound = (args: InArgs): unknown[] => {
  if (!Array.isArray(args)) throw new TypeError('arguments are given by position');
  return args.map((value) => (typeof value === 'boolean' ? Number(value) : value));
};

const result = (columns: string[], rows: Row[], rowsAffected: number, lastInsertRowid: bigint | undefined): ResultSet =>
  ({ columns, columnTypes: [], rows, rowsAffected, lastInsertRowid }) as unknown as ResultSet;

/** @param path any characters @param busyMs how long a statement waits for a lock inside the event loop */
export const createFileClient = (path: string, busyMs: number): Client =>
  new FileClient(path, busyMs) as unknown as Client;
