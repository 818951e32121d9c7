import { randomUUID } from 'node:crypto';
import { createServer, type IncomingMessage } from 'node:http';
import type { AddressInfo } from 'node:net';
import Database from 'libsql';

/**
 * A fixture: libSQL over HTTP (the JSON pipeline of the Hrana protocol, version 2) in front of a local database file, so that
 * the serverless program can be run here. One connection; while a stream holds a transaction the others wait, so that
 * SQLite never answers busy. Positional arguments only.
 */
export interface HranaBridge {
  url: string;
  /** Requests whose text this matches are cut off without an answer, as by a server that is gone. */
  cut?: RegExp;
  /** Takes no connection any more, and takes them again under the same address. */
  pause(): Promise<void>;
  resume(): Promise<void>;
  /** Requests answered so far. */
  requests: number;
  close(): Promise<void>;
}

type Value = { type: 'null' | 'integer' | 'float' | 'text' | 'blob'; value?: string | number; base64?: string };
type Statement = { sql?: string; sql_id?: number; args?: Value[]; named_args?: unknown[] };
type Condition = { type: string; step?: number; cond?: Condition; conds?: Condition[] };
type Batch = { steps: { stmt: Statement; condition?: Condition }[] };
type StreamRequest = { type: string; stmt?: Statement; batch?: Batch; sql?: string; sql_id?: number };
type Failure = { message: string; code?: string };

/** A stream that says nothing for so long is closed and its transaction rolled back. */
const IDLE_MS = 10_000;

const toNative = (v: Value): unknown => {
  if (v.type === 'null') return null;
  if (v.type === 'integer') return BigInt(v.value as string);
  if (v.type === 'blob') return Buffer.from(v.base64 as string, 'base64');
  return v.value;
};

const fromNative = (v: unknown): Value => {
  if (v === null || v === undefined) return { type: 'null' };
  if (typeof v === 'bigint') return { type: 'integer', value: String(v) };
  if (typeof v === 'number') return { type: 'float', value: v };
  if (typeof v === 'string') return { type: 'text', value: v };
  const bytes = v instanceof ArrayBuffer ? new Uint8Array(v) : (v as Uint8Array);
  return { type: 'blob', base64: Buffer.from(bytes).toString('base64') };
};

const failureOf = (error: unknown): Failure => {
  const { message, code } = error as Failure;
  return { message, code: code ?? 'HRANA_BRIDGE' };
};

export async function startHranaBridge(file: string, token: string): Promise<HranaBridge> {
  const db = new Database(file);
  db.exec('pragma journal_mode = wal; pragma foreign_keys = on');
  const number = (sql: string) => Number((db.prepare(sql).raw().get() as unknown as unknown[])[0]);

  function execute({ sql, args = [], named_args = [] }: Statement) {
    if (named_args.length) throw new Error('the bridge takes positional arguments only');
    const before = number('select total_changes()');
    const statement = db.prepare(sql as string).safeIntegers(true);
    const values = args.map(toNative);
    const cols = statement.reader ? statement.columns().map(({ name }) => ({ name })) : [];
    const rows = statement.reader ? (statement.raw().all(...values) as unknown[][]) : [];
    if (!statement.reader) statement.run(...values);
    return {
      cols,
      rows: rows.map((row) => row.map(fromNative)),
      affected_row_count: number('select total_changes()') - before,
      last_insert_rowid: String(number('select last_insert_rowid()')),
    };
  }

  function batch({ steps }: Batch) {
    const results: unknown[] = [];
    const errors: (Failure | null)[] = [];
    const holds = (c: Condition): boolean => {
      if (c.type === 'ok') return Boolean(results[c.step as number]);
      if (c.type === 'error') return Boolean(errors[c.step as number]);
      if (c.type === 'not') return !holds(c.cond as Condition);
      if (c.type === 'and') return (c.conds as Condition[]).every(holds);
      if (c.type === 'or') return (c.conds as Condition[]).some(holds);
      return !db.inTransaction; // is_autocommit
    };
    for (const { stmt, condition } of steps) {
      let result: unknown = null;
      let error: Failure | null = null;
      if (!condition || holds(condition))
        try {
          result = execute(stmt);
        } catch (thrown) {
          error = failureOf(thrown);
        }
      results.push(result);
      errors.push(error);
    }
    return { step_results: results, step_errors: errors };
  }

  /** Batons of open streams with their stored statements. */
  const streams = new Map<string, Map<number, string>>();

  function answer(request: StreamRequest, stored: Map<number, string>) {
    const { type } = request;
    const resolve = <T extends { sql?: string; sql_id?: number }>(s: T): T =>
      s.sql === undefined ? { ...s, sql: stored.get(s.sql_id as number) } : s;
    if (type === 'execute') return { type, result: execute(resolve(request.stmt as Statement)) };
    if (type === 'batch') {
      const { steps } = request.batch as Batch;
      return { type, result: batch({ steps: steps.map((s) => ({ ...s, stmt: resolve(s.stmt) })) }) };
    }
    if (type === 'sequence') db.exec(resolve(request).sql as string);
    else if (type === 'store_sql') stored.set(request.sql_id as number, request.sql as string);
    else if (type === 'close_sql') stored.delete(request.sql_id as number);
    else if (type === 'close') {
      if (db.inTransaction) db.exec('rollback');
    } else throw new Error(`the bridge does not know the request ${type}`);
    return { type };
  }

  /** Baton of the stream whose transaction is open; requests of others wait in `waiting`. */
  let holder: string | undefined;
  let idle: NodeJS.Timeout | undefined;
  const waiting: (() => void)[] = [];
  const release = () => {
    holder = undefined;
    for (const wake of waiting.splice(0)) wake();
  };

  async function pipeline(baton: string | undefined, requests: StreamRequest[]) {
    while (holder !== undefined && holder !== baton) await new Promise<void>((wake) => waiting.push(wake));
    const stored = (baton && streams.get(baton)) || new Map<number, string>();
    if (baton && !streams.delete(baton)) throw new Error(`the stream of baton ${baton} is closed`);
    clearTimeout(idle);
    const results = requests.map((request) => {
      try {
        return { type: 'ok', response: answer(request, stored) };
      } catch (error) {
        return { type: 'error', error: failureOf(error) };
      }
    });
    const next = requests.some((r) => r.type === 'close') ? null : randomUUID();
    if (next) streams.set(next, stored);
    if (!db.inTransaction) release();
    else {
      holder = next as string;
      idle = setTimeout(() => {
        db.exec('rollback');
        streams.delete(next as string);
        release();
      }, IDLE_MS);
    }
    return { baton: next, base_url: null, results };
  }

  const bodyOf = async (request: IncomingMessage) => {
    const parts: Buffer[] = [];
    for await (const part of request) parts.push(part as Buffer);
    return JSON.parse(Buffer.concat(parts).toString()) as { baton?: string; requests: StreamRequest[] };
  };
  const server = createServer(async (request, response) => {
    const send = (status: number, body: unknown) =>
      response.writeHead(status, { 'content-type': 'application/json' }).end(JSON.stringify(body));
    if (request.headers.authorization !== `Bearer ${token}`) return send(401, { message: 'wrong token' });
    if (request.method !== 'POST' || request.url !== '/v2/pipeline') return send(404, { message: 'not found' });
    try {
      const { baton, requests } = await bodyOf(request);
      if (bridge.cut?.test(JSON.stringify(requests))) return response.destroy();
      bridge.requests++;
      return send(200, await pipeline(baton ?? undefined, requests));
    } catch (error) {
      return send(400, failureOf(error));
    }
  });
  const listen = (on: number) => new Promise<void>((resolve) => server.listen(on, '127.0.0.1', resolve));
  await listen(0);
  const { port } = server.address() as AddressInfo;
  const pause = () =>
    new Promise<void>((resolve) => {
      server.close(() => resolve());
      server.closeAllConnections();
    });
  const bridge: HranaBridge = {
    url: `http://127.0.0.1:${port}`,
    requests: 0,
    pause,
    resume: () => listen(port),
    close: async () => {
      clearTimeout(idle);
      await pause();
      db.close();
    },
  };
  return bridge;
}
