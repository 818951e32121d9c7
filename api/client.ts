import { createEventParser } from '../schema/wire/event-stream.ts';
import { type CampaignStatus, OPERATIONS, type Operations, type Problem } from './client-types.ts';

export type * from './client-types.ts';

export interface ClientOptions {
  /** Access token; not needed by a server on a loopback address. */
  token?: string;
  /** In the place of the global `fetch`. */
  fetch?: (url: string, init: RequestInit) => Promise<Response>;
  /** How often a request is sent again when the server says when to come back (429, 503); 20 unless given. */
  tries?: number;
}

/** What the server refused, as it says it (RFC 9457). */
export class ApiProblem extends Error {
  override name = 'ApiProblem';
  constructor(
    readonly status: number,
    /** Code of the closed table of problems, or empty where something else than the server answered. */
    readonly code: string,
    readonly problem: Partial<Problem>,
  ) {
    super([problem.title, problem.detail].filter(Boolean).join(': ') || `status ${status}`);
  }
}

/** What an operation takes: what it does not take need not be given. */
type Input<Name extends keyof Operations> = {
  [Part in 'id' | 'query' | 'body' as Operations[Name][Part] extends undefined ? never : Part]: Operations[Name][Part];
};
type OptionalQuery<T> = T extends { query: infer Q } ? (object extends Q ? Omit<T, 'query'> & { query?: Q } : T) : T;
export type CallInput<Name extends keyof Operations> = OptionalQuery<Input<Name>> & {
  signal?: AbortSignal;
  headers?: Record<string, string>;
};

type ListName = {
  [Name in keyof Operations]: Operations[Name]['answer'] extends { items: unknown[]; next: string | null }
    ? Operations[Name]['query'] extends { limit?: number }
      ? Name
      : never
    : never;
}[keyof Operations];
type ItemOf<Name extends ListName> = Operations[Name]['answer']['items'][number];

/** Rows asked for in one page of a list. */
const PAGE_ROWS = 1000;
const LONGEST_WAIT_S = 60;
const WAIT_OUT = [429, 503];

interface Parts {
  id?: string;
  query?: Record<string, unknown>;
  body?: unknown;
  signal?: AbortSignal;
  headers?: Record<string, string>;
}

/**
 * Typed client of the HTTP interface. `call` does any operation of the document by its name; the rest is what most
 * programs need on top. Every refusal is an ApiProblem; a server out of reach is whatever `fetch` throws.
 */
export class Client {
  readonly #base: string;
  readonly #options: ClientOptions;

  constructor(url: string, options: ClientOptions = {}) {
    this.#base = url.replace(/\/+$/, '');
    this.#options = options;
  }

  /** One operation. JSON comes back parsed; anything else (files, pages, streams) as the Response itself. */
  async call<Name extends keyof Operations>(
    operation: Name,
    input: CallInput<Name>,
  ): Promise<Operations[Name]['answer']> {
    const response = await this.#send(operation, input as Parts);
    const isJson = response.headers.get('content-type')?.startsWith('application/json');
    const answer = response.status === 204 ? undefined : isJson ? await response.json() : response;
    return answer as Operations[Name]['answer'];
  }

  /** Every item of a list, page by page. */
  async *items<Name extends ListName>(operation: Name, input: CallInput<Name>): AsyncGenerator<ItemOf<Name>> {
    const { query, ...rest } = input as Parts;
    let after: string | undefined;
    do {
      const page = { ...rest, query: { ...query, limit: PAGE_ROWS, ...(after !== undefined && { after }) } };
      const { items, next } = await this.call(operation, page as unknown as CallInput<Name>);
      yield* items as ItemOf<Name>[];
      after = next ?? undefined;
    } while (after !== undefined);
  }

  /** A result table as the text of its CSV file. */
  async csv<Name extends Extract<ListName, `list${string}`>>(operation: Name, id: string): Promise<string> {
    return (await this.#send(operation, { id, query: { format: 'csv' } })).text();
  }

  /**
   * Follows the event stream until no job of the campaign is queued or running; resumes it when it ends.
   * `onStatus` hears of every change. Rejects with the reason of `signal` when that aborts.
   */
  async whenSettled(
    id: string,
    { onStatus, signal }: { onStatus?: (status: CampaignStatus) => void; signal?: AbortSignal } = {},
  ): Promise<CampaignStatus> {
    let lastEventId: string | undefined;
    for (;;) {
      const headers = lastEventId === undefined ? undefined : { 'last-event-id': lastEventId };
      const response = await this.#send('streamStatus', { id, signal, headers });
      const reader = response.body!.getReader();
      const decoder = new TextDecoder();
      let status: CampaignStatus | undefined;
      const parse = createEventParser((event) => {
        lastEventId = event.id ?? lastEventId;
        status = JSON.parse(event.data) as CampaignStatus;
        onStatus?.(status);
      });
      for (let piece = await reader.read(); !piece.done; piece = await reader.read()) {
        parse(decoder.decode(piece.value, { stream: true }));
        if (!status?.settled) continue;
        await reader.cancel();
        return status;
      }
    }
  }

  async #send(operation: keyof Operations, { id, query, body, signal, headers }: Parts): Promise<Response> {
    const { token, tries = 20, fetch: send = (url, init) => fetch(url, init) } = this.#options;
    const [method, route] = OPERATIONS[operation];
    const path = route.replace('{id}', encodeURIComponent(id ?? ''));
    const given = Object.entries(query ?? {}).filter(([, value]) => value !== undefined);
    const search = given.length > 0 ? `?${new URLSearchParams(given.map(([k, v]) => [k, String(v)]))}` : '';
    const isForm = typeof FormData !== 'undefined' && body instanceof FormData;
    const isRaw = operation === 'putFile' || isForm;
    const init: RequestInit = {
      method,
      signal,
      headers: {
        ...(token !== undefined && { authorization: `Bearer ${token}` }),
        // A form names its own boundary.
        ...(body !== undefined &&
          !isForm && { 'content-type': isRaw ? 'application/octet-stream' : 'application/json' }),
        ...headers,
      },
      body: (isRaw ? body : body === undefined ? undefined : JSON.stringify(body)) as BodyInit | undefined,
    };
    for (let tried = 0; ; tried++) {
      const response = await send(`${this.#base}${path}${search}`, init);
      if (response.ok) return response;
      const seconds = Number(response.headers.get('retry-after'));
      if (!WAIT_OUT.includes(response.status) || !(seconds > 0) || tried >= tries) throw await problemOf(response);
      // The server names the time to wait when it takes no more for now, or a store of its is busy.
      await response.body?.cancel();
      await new Promise((resolve) => setTimeout(resolve, Math.min(seconds, LONGEST_WAIT_S) * 1000));
      signal?.throwIfAborted();
    }
  }
}

async function problemOf(response: Response): Promise<ApiProblem> {
  const problem = (await response.json().catch(() => ({}))) as Partial<Problem>;
  return new ApiProblem(response.status, problem.type?.split('#')[1] ?? '', problem);
}
