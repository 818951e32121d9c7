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

let ahead: { route: string; answer: Promise<unknown> } | undefined;

/**
 * Asks before whoever needs the answer is there; the next `requestJson` of the same route takes it. Resolves when the answer is
 * read, or refused, which is told to whoever takes it.
 */
export function askAhead(route: string): Promise<void> {
  const answer = requestJson(route);
  ahead = { route, answer };
  return answer.then(
    () => undefined,
    () => undefined,
  );
}

/** The JSON that a GET answers; throws as `request` does. */
export async function requestJson<Answer>(route: string, signal?: AbortSignal): Promise<Answer> {
  if (ahead?.route === route) {
    const { answer } = ahead;
    ahead = undefined;
    return answer as Promise<Answer>;
  }
  return (await request(route, { signal })).json();
}

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

/** A page of a list route. */
const pageRoute = (route: string, filter: Record<string, string>, after?: string): string =>
  `${route}?${new URLSearchParams({ ...filter, limit: '1000', ...(after === undefined ? {} : { after }) })}`;

/** The first page of a whole list route. */
export const firstPage = (route: string): string => pageRoute(route, {});

/** All items of a list route, page after page. */
export async function requestAll<Item>(
  route: string,
  filter: Record<string, string> = {},
  signal?: AbortSignal,
): Promise<Item[]> {
  const items: Item[] = [];
  let after: string | undefined;
  do {
    const page: { items: Item[]; next?: string | null } = await requestJson(pageRoute(route, filter, after), signal);
    items.push(...page.items);
    after = page.next ?? undefined;
  } while (after !== undefined);
  return items;
}
