/** How many different names are watched at once; past that the oldest are forgotten. */
const WATCHED = 10_000;

/** Counts events by name within windows of fixed length, in this process. */
export interface RateLimit {
  /** Ms until the name may go on, 0 when it may now. */
  waitMs(name: string, now: number): number;
  count(name: string, now: number): void;
}

export function createRateLimit(limit: number, windowMs: number): RateLimit {
  const windows = new Map<string, { from: number; events: number }>();
  const current = (name: string, now: number) => {
    const window = windows.get(name);
    return window && now - window.from < windowMs ? window : undefined;
  };
  return {
    waitMs(name, now) {
      const window = current(name, now);
      return window && window.events >= limit ? window.from + windowMs - now : 0;
    },
    count(name, now) {
      const window = current(name, now);
      if (window) {
        window.events++;
        return;
      }
      windows.delete(name);
      windows.set(name, { from: now, events: 1 });
      if (windows.size > WATCHED) windows.delete(windows.keys().next().value as string);
    },
  };
}
