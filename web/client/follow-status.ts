import { createEventParser } from '../../schema/wire/event-stream.ts';
import { loadStatus, openStatusStream } from './campaigns.ts';
import { asProblem, type Problem } from './request.ts';
import type { Status } from './rows.ts';

/** How the page hears of changes: by the event stream, by asking, or not at all. */
export type Link = 'connecting' | 'live' | 'polling' | 'offline';

export interface StatusListener {
  /** `isNews`: the server says that something changed; an answer to polling may be the same again. */
  onStatus(status: Status, isNews: boolean): void;
  onLink(link: Link, problem?: Problem): void;
}

const POLL_EVERY_MS = 2_000;
/** Polls between two tries of the stream. */
const POLLS_PER_TRY = 5;

const pause = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms));

/**
 * Follows a campaign until the signal aborts: the stream first, resumed when it ends; polling while it cannot be had. A state that is
 * `known` is not told again.
 */
export async function followStatus(
  id: string,
  listener: StatusListener,
  signal: AbortSignal,
  known?: string,
): Promise<void> {
  let lastEventId = known;
  while (!signal.aborted) {
    const started = performance.now();
    try {
      const response = await openStatusStream(id, lastEventId, signal);
      const parse = createEventParser((event) => {
        lastEventId = event.id ?? lastEventId;
        listener.onStatus(JSON.parse(event.data), true);
      });
      listener.onLink('live');
      const reader = (response.body as ReadableStream<Uint8Array>).getReader();
      const decoder = new TextDecoder();
      for (let piece = await reader.read(); !piece.done; piece = await reader.read()) {
        parse(decoder.decode(piece.value, { stream: true }));
      }
      // The server ends a stream after a minute; one that ends at once is broken.
      if (performance.now() - started < POLL_EVERY_MS) throw new Error('the event stream ended at once');
    } catch {
      for (let i = 0; i < POLLS_PER_TRY && !signal.aborted; i++) {
        try {
          listener.onStatus(await loadStatus(id, signal), false);
          listener.onLink('polling');
        } catch (error) {
          if (signal.aborted) return;
          listener.onLink('offline', asProblem(error));
        }
        await pause(POLL_EVERY_MS);
      }
    }
  }
}
