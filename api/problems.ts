import type { ContentfulStatusCode } from 'hono/utils/http-status';

/** What the API answers when it cannot do what was asked: the closed table. code → status, title, what to do. */
export const PROBLEMS = {
  'malformed-json': [400, 'The body is not JSON', 'Send one JSON object in UTF-8.'],
  'malformed-form': [400, 'The body is not a multipart form', 'Send multipart/form-data with the files under files[].'],
  'token-needed': [
    401,
    'An access token is needed',
    'Send Authorization: Bearer TOKEN; the keeper of the server makes tokens with: ratespan token add.',
  ],
  'token-refused': [
    401,
    'The access token does not count',
    'It may be mistyped, revoked or too old; ask the keeper of the server for another.',
  ],
  'role-too-low': [403, 'The access token does not allow this', 'Use a token of the role that the answer names.'],
  'host-refused': [
    403,
    'The Host header is not one of this machine',
    'An open server answers only under localhost, 127.0.0.1 or [::1] with its own port.',
  ],
  'origin-refused': [
    403,
    'The request comes from a page of another origin',
    'Use the page that this server hands out.',
  ],
  'proxy-refused': [
    403,
    'The request came through a proxy',
    'An open server answers only direct requests from its own machine. Listen on another address, with access tokens, to stand behind a proxy.',
  ],
  'not-found': [404, 'There is no such thing', 'List the collection to see what there is.'],
  'method-not-allowed': [405, 'The route does not take this method', 'Use one of the methods in the Allow header.'],
  'name-taken': [409, 'The name is taken', 'Choose another name, or use the campaign that has it.'],
  'scan-superseded': [409, 'The scan was replaced', 'Correct the scan of the file that replaced it.'],
  'job-not-failed': [409, 'The job has not failed', 'Only a failed job can be tried again by hand.'],
  'key-in-use': [409, 'A request with this Idempotency-Key is being answered', 'Send it again in a moment.'],
  'length-required': [411, 'Content-Length is missing', 'Send the size of the body in Content-Length.'],
  'too-large': [413, 'The body is too large', 'Split it, or compress text files with gzip or zip.'],
  'media-type-refused': [415, 'The media type is not taken', 'Send the media type that the reference names.'],
  'invalid-input': [422, 'The request has a value that is not allowed', 'Correct the field named in the answer.'],
  'bad-path': [
    422,
    'The file path is not allowed',
    'Use a relative path with /, at most 512 bytes, without empty, . or .. parts, control characters or backslashes, no part starting with = + - or @.',
  ],
  'key-reused': [
    422,
    'The Idempotency-Key was used for another request',
    'Take a new key for a new request; a key counts for a day.',
  ],
  'too-many-requests': [429, 'Too many requests', 'Wait as long as Retry-After says, then go on.'],
  'internal-error': [500, 'Something failed on our side', 'Try again; if it stays, look at the log of the server.'],
  'stores-busy': [
    503,
    'A store is full, locked or out of reach just now',
    'Nothing was lost: send the request again after Retry-After. If it stays, look at disk space and the log of the server.',
  ],
  'not-ready': [503, 'A store that the server needs cannot be reached', 'Check the database and the blob store.'],
} as const satisfies Record<string, readonly [ContentfulStatusCode, string, string]>;

export type ProblemCode = keyof typeof PROBLEMS;

/** Members that stand beside the standard ones where they apply. */
export interface ProblemDetails {
  field?: string;
  file?: string;
  line?: number;
  allow?: string;
  retryAfterS?: number;
}

/** Thrown anywhere in a route; `onError` turns it into the answer. */
export class Problem extends Error {
  constructor(
    readonly code: ProblemCode,
    readonly detail: string,
    readonly details: ProblemDetails = {},
  ) {
    super(`${code}: ${detail}`);
    this.name = 'Problem';
  }
}

/** Where the meaning of a problem can be read: a path that resolves on the server that answered (RFC 9457, 3.1.1). */
export const problemType = (code: ProblemCode): string => `/v1/reference#${code}`;

/** RFC 9457 answer; `action` says what to do next. */
export function problemResponse({ code, detail, details }: Problem): Response {
  const [status, title, action] = PROBLEMS[code];
  const { allow, retryAfterS, ...members } = details;
  const headers: Record<string, string> = { 'content-type': 'application/problem+json', 'cache-control': 'no-store' };
  if (allow) headers['allow'] = allow;
  if (retryAfterS !== undefined) headers['retry-after'] = String(Math.max(1, Math.ceil(retryAfterS)));
  if (status === 401) headers['www-authenticate'] = 'Bearer realm="ratespan"';
  return new Response(JSON.stringify({ type: problemType(code), title, status, detail, action, ...members }), {
    status,
    headers,
  });
}
