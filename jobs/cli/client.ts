import { openAsBlob } from 'node:fs';
import { Client as ApiClient, ApiProblem } from '../../api/client.ts';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import type { ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import type { FileReceipt, ResultRow } from '../store/index.ts';
import type { FolderFile } from './campaign-folder.ts';
import { ServerError, UsageError } from './exit.ts';

/** Refusals of one file that leave the others as they are. */
const FILE_REFUSALS = [413, 422];

/** The HTTP interface as the client verbs use it. Every failure is a ServerError that quotes what the server said. */
export class Client {
  readonly #base: string;
  readonly #api: ApiClient;

  constructor(url: string, token?: string) {
    if (!URL.canParse(url) || !/^https?:$/.test(new URL(url).protocol)) {
      throw new UsageError(`the server address must be an http(s) URL, not ${JSON.stringify(url)}`);
    }
    this.#base = url.replace(/\/+$/, '');
    this.#api = new ApiClient(this.#base, { token });
  }

  /** What the client throws, as the command line tells it. */
  #explain(error: unknown): Error {
    if (error instanceof ApiProblem) return new ServerError(`${this.#base} answers ${error.status}: ${error.message}`);
    const { cause, message } = error as Error;
    return new ServerError(
      `cannot reach ${this.#base}: ${cause instanceof Error ? cause.message : message}; is the server running (ratespan serve)?`,
    );
  }

  async #ask<T>(ask: (api: ApiClient) => Promise<T>): Promise<T> {
    try {
      return await ask(this.#api);
    } catch (error) {
      throw this.#explain(error);
    }
  }

  /** The campaign of that name, made if missing. @returns its id */
  openCampaign(name: string): Promise<string> {
    return this.#ask(async (api) => {
      try {
        return (await api.call('createCampaign', { body: { name } })).id;
      } catch (error) {
        if (!(error instanceof ApiProblem && error.code === 'name-taken')) throw error;
        return (await api.call('getCampaign', { id: name })).id;
      }
    });
  }

  putFile(campaign: string, { path, location }: FolderFile): Promise<FileReceipt> {
    return this.#ask(async (api) => {
      try {
        return await api.call('putFile', { id: campaign, query: { path }, body: await openAsBlob(location) });
      } catch (error) {
        if (!(error instanceof ApiProblem && FILE_REFUSALS.includes(error.status))) throw error;
        return { file: path, outcome: 'refused', reason: error.problem.detail ?? error.message };
      }
    });
  }

  status(campaign: string): Promise<CampaignStatus> {
    return this.#ask((api) => api.call('getStatus', { id: campaign }));
  }

  /** The answer to one question about a sample, by its id. */
  forecast(sampleId: string, question: object): Promise<ForecastRow[]> {
    return this.#ask(
      async (api) => (await api.call('forecast', { id: sampleId, body: question })).items as ForecastRow[],
    );
  }

  /** All rows of a table, page by page. */
  async *rows(campaign: string, table: ResultTable): AsyncGenerator<ResultRow> {
    const operation = `list${table[0].toUpperCase()}${table.slice(1)}` as `list${Capitalize<ResultTable>}`;
    try {
      for await (const row of this.#api.items(operation, { id: campaign })) yield { ...row };
    } catch (error) {
      throw this.#explain(error);
    }
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
