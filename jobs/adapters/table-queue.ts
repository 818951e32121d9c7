import type { Queue } from '../ports/index.ts';

/** Wake-ups within one process: the job table itself is the queue, and other processes find its rows by looking. */
export function createTableQueue(): Queue {
  const waiting = new Set<() => void>();
  const ring = () => {
    for (const resolve of waiting) resolve();
    waiting.clear();
  };
  return {
    async wake(_jobId, delaySeconds) {
      if (delaySeconds > 0) setTimeout(ring, delaySeconds * 1000).unref();
      else ring();
    },
    heard(timeoutMs, signal) {
      return new Promise((resolve) => {
        const done = () => {
          clearTimeout(timer);
          waiting.delete(done);
          signal.removeEventListener('abort', done);
          resolve();
        };
        const timer = setTimeout(done, timeoutMs);
        waiting.add(done);
        signal.addEventListener('abort', done);
      });
    },
  };
}
