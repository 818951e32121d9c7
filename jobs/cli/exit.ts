/** Exit codes of the command line. */
export const EXIT = { done: 0, failed: 1, usage: 2, nothingFitted: 3, server: 4, interrupted: 130 } as const;

/** Wrong usage, or a folder that cannot be read: one clear sentence, exit 2. */
export class UsageError extends Error {
  override name = 'UsageError';
}

/** The server cannot be reached or refuses: exit 4. */
export class ServerError extends Error {
  override name = 'ServerError';
}

/** Stopped by the user: exit 130; the same command again goes on from there. */
export class Interrupted extends Error {
  override name = 'Interrupted';
}
