import type { Clock } from '../ports/index.ts';

export const systemClock: Clock = {
  now: () => Date.now(),
  sleep(durationMs, signal) {
    return new Promise((resolve) => {
      if (signal?.aborted) return resolve();
      const done = () => {
        clearTimeout(timer);
        signal?.removeEventListener('abort', done);
        resolve();
      };
      const timer = setTimeout(done, durationMs);
      signal?.addEventListener('abort', done);
    });
  },
};
