import { type Statement, text } from './statement.ts';

export { runBatch, type Statement } from './statement.ts';

/** The lease that a write-back must still hold. */
export interface Lease {
  jobId: string;
  generation: number;
}

/** The lease went to another worker: the whole batch was rejected and its work is dropped. */
export class LateWorker extends Error {
  constructor({ jobId, generation }: Lease) {
    super(`job ${jobId}: lease generation ${generation} is over; its write-back was rejected whole`);
    this.name = 'LateWorker';
  }
}

function* causes(error: unknown): Generator<{ code?: unknown; message?: unknown }> {
  for (let e = error, depth = 0; e && typeof e === 'object' && depth < 5; depth++) {
    yield e as { code?: unknown; message?: unknown };
    e = (e as { cause?: unknown }).cause;
  }
}

/** A broken uniqueness, check or foreign key, from the local library or over HTTP. */
export function isConstraint(error: unknown): boolean {
  for (const { code } of causes(error))
    if (typeof code === 'string' && code.startsWith('SQLITE_CONSTRAINT')) return true;
  return false;
}

export function isFenceBreak(error: unknown): boolean {
  if (!isConstraint(error)) return false;
  for (const { message } of causes(error)) if (typeof message === 'string' && message.includes('fence_ok')) return true;
  return false;
}

/**
 * One batch that fails whole unless `guard` changes exactly one row. An UPDATE that hits nothing does not stop a batch by
 * itself: the count of its changes is inserted under the check `ok = 1`.
 */
export function guarded(guard: Statement, rest: Statement[]): Statement[] {
  return [guard, text`insert into fence (ok) select changes() where true on conflict (ok) do nothing`, ...rest];
}
