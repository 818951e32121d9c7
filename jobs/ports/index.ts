import type { LibSQLDatabase } from 'drizzle-orm/libsql';
import type { FitInput, FitResult } from '../../schema/wire/parameters.ts';
import type { ReduceOutcome } from '../../schema/wire/reduced.ts';
import type { SampleForecastInput, SampleForecastResult } from '../../schema/wire/sample-forecast.ts';
import type { ReadOutcome, ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import type { JudgeInput, JudgeResult } from '../../schema/wire/verdicts.ts';

/**
 * The database. `read` never writes (a structure test holds that); every write goes through the one guarded door `write`,
 * which serialises, and retries after a busy error on a fresh connection (a libSQL connection that met SQLITE_BUSY once loses writes in silence).
 */
export interface Database {
  read: LibSQLDatabase;
  write<T>(work: (db: LibSQLDatabase) => Promise<T>): Promise<T>;
  close(): void;
}

/** Originals and derived curves. Keys are relative paths with `/`. */
export interface BlobStore {
  /** Stores the stream whole or not at all. `length` is checked where the store can. */
  put(key: string, body: ReadableStream<Uint8Array> | Uint8Array, length?: number): Promise<void>;
  /** Throws BlobMissing when there is none. */
  get(key: string): Promise<ReadableStream<Uint8Array>>;
  /** The whole blob in memory. Throws BlobMissing when there is none. */
  bytes(key: string): Promise<Uint8Array>;
  has(key: string): Promise<boolean>;
  delete(key: string): Promise<void>;
  list(prefix: string): AsyncIterable<{ key: string; size: number; modifiedMs: number }>;
}

export class BlobMissing extends Error {
  constructor(readonly key: string) {
    super(`no blob under key ${key}`);
    this.name = 'BlobMissing';
  }
}

/** A wake-up: the job row is the record, a message holds only its id and may be lost or doubled. */
export interface Queue {
  wake(jobId: string, delaySeconds: number): Promise<void>;
  /** Resolves at the next wake-up that this process hears of, after `timeoutMs`, or when `signal` aborts; absent where wake-ups are delivered from outside. */
  heard?(timeoutMs: number, signal: AbortSignal): Promise<void>;
}

export interface Clock {
  /** ms since the epoch */
  now(): number;
  /** Resolves after `durationMs`, at once when `signal` aborts. Tests move time instead of waiting. */
  sleep(durationMs: number, signal?: AbortSignal): Promise<void>;
}

/** What a path alone says: the reading rooms know, the store asks. */
export interface PathRules {
  /** Why the path is not allowed, in words that follow it in a sentence, or undefined. */
  problem(path: string): string | undefined;
  kind(path: string): 'data' | 'sheet' | 'archive';
  /** The path that a file has in its campaign: `x.txt.gz` is `x.txt` there. */
  unpacked(path: string): string;
  /** The folder layout SAMPLE/INSTRUMENT/file. */
  assignment(path: string): { sample: string; instrument: string } | undefined;
}

/**
 * Where the pure, long computations run: inline (serverless, tests) or in worker threads (Node). Arrays in, arrays out.
 * Typed arrays are handed over, not copied: the caller must not use `bytes` or the columns of `scan` again.
 */
export interface Compute {
  readScan(bytes: Uint8Array, file: string): Promise<ReadOutcome>;
  reduceScan(scan: ReadScan, input: ReduceInput): Promise<ReduceOutcome>;
  fitSample(input: FitInput): Promise<FitResult>;
  judgeCurvature(input: JudgeInput): Promise<JudgeResult>;
  forecastSample(input: SampleForecastInput): Promise<SampleForecastResult>;
  close(): Promise<void>;
}

/** One answered request. `route` is the pattern, never what stood in its place; nothing here is secret. */
export interface RequestEvent {
  requestId: string;
  method: string;
  route: string;
  status: number;
  durationMs: number;
  /** The token that asked, by its id. */
  tokenId?: string;
}

/** One attempt at a job. */
export interface JobEvent {
  jobId: string;
  campaignId: string;
  step: string;
  attempt: number;
  end: 'done' | 'failed' | 'postponed' | 'late';
  durationMs: number;
  error?: string;
}

/** Told what happens, for logs and figures. */
export interface Observer {
  request(event: RequestEvent): void;
  job(event: JobEvent): void;
  /** Something that nobody asked for: told to the operator. */
  trouble(what: string, error: unknown, ids?: Record<string, string>): void;
  /** The figures so far, as OpenMetrics families without the end mark. */
  figures(): string;
}

export interface Ports {
  database: Database;
  blobs: BlobStore;
  queue: Queue;
  clock: Clock;
  compute: Compute;
  paths: PathRules;
}
