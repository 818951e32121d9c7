import { openAsBlob } from 'node:fs';
import { setTimeout as sleep } from 'node:timers/promises';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import type { ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import type { FileReceipt, ResultRow } from '../store/index.ts';
import type { FolderFile } from './campaign-folder.ts';
import { ServerError, UsageError } from './exit.ts';

/** Answers that say when to come again. */
const WAIT_OUT = [429, 503];
const WAIT_TRIES = 20;
const LONGEST_WAIT_S = 60;

/** Rows asked for in one page of a table. */
const PAGE_ROWS = 1000;

/** The HTTP interface as the client verbs use it. Every failure is a ServerError that quotes what the server said. */
export class Client {
  readonly #base: string;
  readonly #token?: string;

  constructor(url: string, token?: string) {
    if (!URL.canParse(url) || !/^https?:$/.test(new URL(url).protocol)) {
      throw new UsageError(`the server address must be an http(s) URL, not ${JSON.stringify(url)}`);
    }
    this.#base = url.replace(/\/+$/, '');
    this.#token = token;
  }

  async #request(
    method: string,
    path: string,
    body?: Blob | string,
    accept: readonly number[] = [],
  ): Promise<Response> {
    const headers: Record<string, string> = {};
    if (this.#token) headers.authorization = `Bearer ${this.#token}`;
    if (body !== undefined)
      headers['content-type'] = typeof body === 'string' ? 'application/json' : 'application/octet-stream';
    let response: Response;
    try {
      response = await fetch(`${this.#base}/v1${path}`, { method, headers, body });
      // The server names the time to wait when it takes no more for now, or a store of its is busy.
      for (let tries = 1; WAIT_OUT.includes(response.status) && tries <= WAIT_TRIES; tries++) {
        const seconds = Number(response.headers.get('retry-after'));
        if (!(seconds > 0)) break;
        await response.body?.cancel();
        await sleep(Math.min(seconds, LONGEST_WAIT_S) * 1000);
        response = await fetch(`${this.#base}/v1${path}`, { method, headers, body });
      }
    } catch (error) {
      const cause = (error as Error).cause;
      throw new ServerError(
        `cannot reach ${this.#base}: ${cause instanceof Error ? cause.message : (error as Error).message}; is the server running (ratespan serve)?`,
      );
    }
    if (response.ok || accept.includes(response.status)) return response;
    const problem = (await response.json().catch(() => ({}))) as { title?: string; detail?: string };
    throw new ServerError(
      `${this.#base} answers ${response.status} to ${method} ${path.split('?')[0]}: ${[problem.title, problem.detail].filter(Boolean).join(': ') || response.statusText}`,
    );
  }

  /** The campaign of that name, made if missing. @returns its id */
  async openCampaign(name: string): Promise<string> {
    const made = await this.#request('POST', '/campaigns', JSON.stringify({ name }), [409]);
    if (made.status !== 409) return ((await made.json()) as { id: string }).id;
    const found = await this.#request('GET', `/campaigns/${encodeURIComponent(name)}`);
    return ((await found.json()) as { id: string }).id;
  }

  async putFile(campaign: string, file: FolderFile): Promise<FileReceipt> {
    const body = await openAsBlob(file.location);
    const path = `/campaigns/${encodeURIComponent(campaign)}/files?path=${encodeURIComponent(file.path)}`;
    const response = await this.#request('PUT', path, body, [422, 413]);
    if (response.status === 202) return (await response.json()) as FileReceipt;
    const problem = (await response.json().catch(() => ({}))) as { detail?: string };
    return { file: file.path, outcome: 'refused', reason: problem.detail ?? response.statusText };
  }

  async status(campaign: string): Promise<CampaignStatus> {
    const response = await this.#request('GET', `/campaigns/${encodeURIComponent(campaign)}/status`);
    return (await response.json()) as CampaignStatus;
  }

  /** The answer to one question about a sample, by its id. */
  async forecast(sampleId: string, question: object): Promise<ForecastRow[]> {
    const path = `/samples/${encodeURIComponent(sampleId)}/forecasts`;
    const response = await this.#request('POST', path, JSON.stringify(question));
    return ((await response.json()) as { items: ForecastRow[] }).items;
  }

  /** All rows of a table, page by page. */
  async *rows(campaign: string, table: ResultTable): AsyncGenerator<ResultRow> {
    let after: string | null = null;
    do {
      const from: string = after === null ? '' : `&after=${encodeURIComponent(after)}`;
      const path = `/campaigns/${encodeURIComponent(campaign)}/${table}?limit=${PAGE_ROWS}${from}`;
      const page = (await (await this.#request('GET', path)).json()) as { items: ResultRow[]; next: string | null };
      yield* page.items;
      after = page.next;
    } while (after !== null);
  }
}

/** Server and token from the arguments, else from the environment. */
export function clientFromArguments(
  values: Record<string, string | boolean | undefined>,
  fallback?: string,
): Client | undefined {
  const url = values.to ?? (process.env.RATESPAN_URL || fallback);
  const token = values.token ?? (process.env.RATESPAN_TOKEN || undefined);
  return url === undefined ? undefined : new Client(String(url), token === undefined ? undefined : String(token));
}
