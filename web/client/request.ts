import { accessToken, isTokenWanted } from '../state/access.ts';

/** What went wrong, in words, with what to do next. */
export class Problem extends Error {
  readonly status: number;
  readonly title: string;
  readonly detail: string;
  readonly action: string;

  constructor(status: number, title: string, detail: string, action: string) {
    super(detail);
    this.status = status;
    this.title = title;
    this.detail = detail;
    this.action = action;
  }
}

const ACTIONS: Record<number, string> = {
  401: 'Give the access token that the keeper of this server made for you.',
  403: 'Open the page at the address that the server printed when it started.',
  404: 'Go back to the list of campaigns; it may have been deleted.',
  409: 'Choose another name, or open the campaign that has this one.',
  413: 'Split the file or pack it as .gz or .zip, then add it again.',
  422: 'Correct what is named above and try again.',
  429: 'Wait a minute; the page tries again by itself.',
};

const unreachable = (cause: unknown): Problem =>
  new Problem(
    0,
    'The server does not answer',
    cause instanceof Error ? cause.message : String(cause),
    'Check that the server runs (ratespan serve) and that this computer reaches it; the page keeps trying.',
  );

/**
 * One request to the API under `/v1`.
 * Throws a Problem for every answer that is not 2xx (problem+json where given) and when no answer comes.
 */
export async function request(route: string, init: RequestInit = {}): Promise<Response> {
  let response: Response;
  const token = accessToken.value;
  const headers = token === '' ? init.headers : { ...init.headers, authorization: `Bearer ${token}` };
  try {
    response = await fetch(`/v1${route}`, { ...init, headers });
  } catch (cause) {
    if (init.signal?.aborted) throw cause;
    throw unreachable(cause);
  }
  if (response.ok) return response;
  if (response.status === 401) isTokenWanted.value = true;
  const body = await response.json().catch(() => ({}));
  const title = typeof body.title === 'string' ? body.title : `The server answered ${response.status}`;
  const detail = typeof body.detail === 'string' ? body.detail : `${init.method ?? 'GET'} /v1${route}`;
  const action = ACTIONS[response.status] ?? 'Try again; if it stays, look at the log of the server.';
  throw new Problem(response.status, title, detail, action);
}

export const asProblem = (error: unknown): Problem =>
  error instanceof Problem
    ? error
    : new Problem(0, 'The page met an error', String(error), 'Reload the page; if it stays, report it with this text.');

/** All items of a list route, page after page. */
export async function requestAll<Item>(
  route: string,
  filter: Record<string, string> = {},
  signal?: AbortSignal,
): Promise<Item[]> {
  const items: Item[] = [];
  let after: string | undefined;
  do {
    const query = new URLSearchParams({ ...filter, limit: '1000', ...(after === undefined ? {} : { after }) });
    const page = await (await request(`${route}?${query}`, { signal })).json();
    items.push(...page.items);
    after = page.next ?? undefined;
  } while (after !== undefined);
  return items;
}
