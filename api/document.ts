import { CSV_RULE } from './csv-lists.ts';
import { EXAMPLES } from './examples.ts';
import type { ApiApp } from './openapi.ts';
import { PROBLEMS, type ProblemCode, problemType } from './problems.ts';
import type { ApiDocument, Operation } from './reference-page.ts';

const DESCRIPTION = [
  'Crystallisation kinetics from heating scans. JSON with the column names of the result files as keys; missing is null. Lists are {items, next}.',
  CSV_RULE,
  'Errors are problems (RFC 9457), listed by status with every route. Unknown query parameters and body fields are refused. Result routes carry an ETag.',
  'Stable within /v1: routes, operation names, ids, keys with their units, order of the columns, codes of problems and flags, states. Keys, columns, codes, optional parameters and routes may be added: a client leaves aside what it does not know.',
  'Not promised: wording of sentences (title, detail, action, reason, sentence), the last digits of numbers after a change of version, the form of an id, of `next` and of an ETag, /metrics, the two pages, the report, and the order of lists where none is named.',
].join(' ');

/** Every answer under /v1 but the two documents may ask for a token. */
const OPEN_ROUTES = ['/v1/openapi.json', '/v1/reference', '/healthz', '/readyz'];

/** What an operation may refuse, from what it takes. Routes throw nothing else; the property run of the tests holds them to it. */
function codesOf(method: string, path: string, operation: Operation): ProblemCode[] {
  const codes: ProblemCode[] = ['host-refused', 'origin-refused', 'proxy-refused', 'invalid-input', 'internal-error'];
  if (!OPEN_ROUTES.includes(path))
    codes.push('token-needed', 'token-refused', 'role-too-low', 'too-many-requests', 'stores-busy');
  if (path.includes('{id}') || path === '/v1/jobs') codes.push('not-found');
  const body = Object.keys(operation.requestBody?.content ?? {});
  if (body.includes('application/json')) codes.push('malformed-json', 'media-type-refused', 'too-large');
  if (body.includes('application/octet-stream')) codes.push('length-required', 'too-large', 'bad-path');
  if (body.includes('multipart/form-data'))
    codes.push('length-required', 'too-large', 'media-type-refused', 'malformed-form');
  if (method === 'post') codes.push('key-in-use', 'key-reused');
  if (path === '/readyz') codes.push('not-ready');
  return [...codes, ...(OWN_CODES[`${method} ${path}`] ?? [])];
}

/** Refusals that only one route knows. */
const OWN_CODES: Readonly<Record<string, ProblemCode[]>> = {
  'post /v1/campaigns': ['name-taken'],
  'patch /v1/campaigns/{id}': ['name-taken'],
  'patch /v1/scans/{id}': ['scan-superseded', 'bad-path'],
  'post /v1/jobs/{id}/retry': ['job-not-failed'],
};

const exampleOf = (code: ProblemCode) => {
  const [status, title, action] = PROBLEMS[code];
  return { value: { type: problemType(code), title, status, detail: 'What exactly was refused.', action } };
};

/** Problem answers by status, each with the codes that it may carry. */
function problemAnswers(codes: readonly ProblemCode[]): Operation['responses'] {
  const byStatus = new Map<number, ProblemCode[]>();
  for (const code of codes) byStatus.set(PROBLEMS[code][0], [...(byStatus.get(PROBLEMS[code][0]) ?? []), code]);
  return Object.fromEntries(
    [...byStatus]
      .sort(([a], [b]) => a - b)
      .map(([status, of]) => [
        String(status),
        {
          description: of.map((code) => `${code}: ${PROBLEMS[code][1]}.`).join(' '),
          content: {
            'application/problem+json': {
              schema: { $ref: '#/components/schemas/Problem' },
              examples: Object.fromEntries(of.map((code) => [code, exampleOf(code)])),
            },
          },
        },
      ]),
  );
}

const headerParameter = (name: string, description: string) => ({
  name,
  in: 'header',
  required: false,
  description,
  schema: { type: 'string' },
});

/** Fills in what the routes share: name, examples, problems by status, headers, access. */
function complete(method: string, path: string, operation: Operation): Operation {
  const { id, request, answer } = EXAMPLES[`${method} ${path}`] ?? { id: '' };
  const { default: _, ...answers } = operation.responses;
  for (const { content } of Object.values(answers)) {
    const first = Object.values(content ?? {})[0];
    if (first && answer !== undefined) first.example = answer;
  }
  const json = operation.requestBody?.content['application/json'];
  if (json) json.example = request;
  const parameters = [...(operation.parameters ?? [])];
  if (method === 'post')
    parameters.push(headerParameter('idempotency-key', 'The same request again within a day gets the first answer.'));
  if ('304' in answers) parameters.push(headerParameter('if-none-match', 'ETag of an earlier answer.'));
  return {
    operationId: id,
    ...operation,
    parameters,
    responses: { ...answers, ...problemAnswers(codesOf(method, path, operation)) },
    security: OPEN_ROUTES.includes(path) ? [] : [{ token: [] }, {}],
  };
}

/** The interface as an OpenAPI 3.1 document, from the routes themselves. */
export function describeApi(app: ApiApp): ApiDocument {
  const document = app.getOpenAPI31Document({
    openapi: '3.1.0',
    info: { title: 'ratespan', version: '1', description: DESCRIPTION, license: { name: 'MIT' } },
    servers: [{ url: '/' }],
  }) as unknown as ApiDocument;
  const paths = Object.entries(document.paths ?? {}).map(([path, methods]) => [
    path,
    Object.fromEntries(Object.entries(methods).map(([method, o]) => [method, complete(method, path, o)])),
  ]);
  return {
    ...document,
    paths: Object.fromEntries(paths),
    components: {
      ...document.components,
      securitySchemes: {
        token: { type: 'http', scheme: 'bearer', description: 'Not needed on a loopback address.' },
      },
    },
  };
}
