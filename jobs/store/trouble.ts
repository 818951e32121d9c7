/** Codes of a store that is full, locked or out of reach: no fault of the job, so no attempt is counted. */
const CODES =
  /^(SQLITE_(BUSY|FULL|IOERR|LOCKED)|ENOSPC|EDQUOT|EIO|EMFILE|ENFILE|EROFS|ECONN|ETIMEDOUT|EHOSTUNREACH|ENETUNREACH|EAI_AGAIN|ENOTFOUND|EPIPE|UND_ERR)/;
const WORDS = /fetch failed|Network connection lost|database is locked|database or disk is full|no space left/i;

/** Whether an error tells of the stores rather than of what was asked of them. */
export function isStoreTrouble(error: unknown): boolean {
  let cause = error as { code?: unknown; message?: unknown; retryable?: unknown; cause?: unknown } | undefined;
  for (let depth = 0; cause && typeof cause === 'object' && depth < 6; depth++) {
    if (cause.retryable === true) return true;
    if (typeof cause.code === 'string' && CODES.test(cause.code)) return true;
    if (typeof cause.message === 'string' && WORDS.test(cause.message)) return true;
    cause = cause.cause as typeof cause;
  }
  return false;
}
