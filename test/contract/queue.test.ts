import type { Queue as MessageQueue } from '@cloudflare/workers-types';
import { expect, it } from 'vitest';
import { createPlatformQueue, type WakeMessage } from '../../jobs/adapters/platform-queue.ts';
import { createTableQueue } from '../../jobs/adapters/table-queue.ts';

const never = () => new AbortController().signal;

it('a wake-up within the process is heard by everyone who listens, once', async () => {
  const queue = createTableQueue();
  const heard = Promise.all([queue.heard?.(60_000, never()), queue.heard?.(60_000, never())]);
  await queue.wake('j', 0);
  await heard;
  let again = false;
  const stop = new AbortController();
  const second = queue.heard?.(60_000, stop.signal).then(() => {
    again = true;
  });
  await new Promise((resolve) => setImmediate(resolve));
  expect(again).toBe(false);
  stop.abort();
  await second;
});

it('listening ends with the time, and a delayed wake-up comes later', async () => {
  const queue = createTableQueue();
  await queue.heard?.(1, never());
  const heard = queue.heard?.(60_000, never());
  await queue.wake('j', 0.001);
  await heard;
});

it('a platform message holds nothing but the id, with whole seconds of delay up to the limit of a day', async () => {
  const sent: unknown[] = [];
  const messages = {
    send: async (body: WakeMessage, options: unknown) => {
      sent.push([body, options]);
    },
  } as unknown as MessageQueue<WakeMessage>;
  const queue = createPlatformQueue(messages);
  expect(queue.heard).toBeUndefined();
  await queue.wake('j_1', 0);
  await queue.wake('j_2', 1.2);
  await queue.wake('j_3', 1e9);
  expect(sent).toEqual([
    [{ jobId: 'j_1' }, { delaySeconds: 0 }],
    [{ jobId: 'j_2' }, { delaySeconds: 2 }],
    [{ jobId: 'j_3' }, { delaySeconds: 86_400 }],
  ]);
});
