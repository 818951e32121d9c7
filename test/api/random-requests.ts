import { createApp } from '../../api/app.ts';
import { createRandom, type Random } from '../../jobs/numeric/random.ts';
import { createCampaign, createToken, findCampaign, LOCAL_LAB } from '../../jobs/store/index.ts';
import { TOKEN_ROLES } from '../../schema/wire/states.ts';
import { drain, openTestPorts, send, type TestPorts } from '../runner/test-ports.ts';
import { csvRecords } from './csv-cells.ts';
import { createShapeCheck } from './document-shapes.ts';
import { type DocumentedOperation, drawValue, operationsOf } from './draw-request.ts';
import { type Body, HOST } from './harness.ts';

/** Everybody who may ask: the open server, one token a role, another lab's keeper, a token that does not count, none. */
const ACTORS = ['open', ...TOKEN_ROLES, 'other lab', 'wrong', 'none'] as const;
type Actor = (typeof ACTORS)[number];

export interface RequestsOutcome {
  requests: number;
  /** Answers that break the document, at most a few. */
  failures: string[];
  failureCount: number;
  /** What the log of the server told: nothing, unless something failed inside. */
  troubles: unknown[];
  byStatus: Map<number, number>;
  byActor: Map<Actor, number>;
  /** Documented pairs of operation and status below 500, and those that were met. */
  documented: Set<string>;
  met: Set<string>;
}

const BLOCK = 5000;
/** So many ms pass at each request, in every other block: then the limit of a token is met too. */
const STEP_MS = 60;
const FILE_PATHS = ['A/oven/1.txt', 'A/oven/2.txt', 'B/oven/1.txt', 'samples.csv', '../x', 'a//b', '=x/y.txt', ''];
const FAILURES_TOLD = 5;

/** Sends `count` requests drawn from the document that the server itself hands out, and holds every answer to it. */
export async function sendRandomRequests(count: number, seed: string): Promise<RequestsOutcome> {
  const ports = await openTestPorts();
  try {
    return await sendTo(ports, count, createRandom(seed));
  } finally {
    await ports.close();
  }
}

async function sendTo(ports: TestPorts, count: number, random: Random): Promise<RequestsOutcome> {
  const troubles: unknown[] = [];
  const observer = {
    request: () => {},
    job: () => {},
    figures: () => '',
    trouble: (...all: unknown[]) => troubles.push(all.map(String)),
  };
  const stream = { pollMs: 1, lifeMs: 60_000 };
  const open = createApp(ports, { access: { port: () => 8787 }, observer, stream });
  const closed = createApp(ports, {
    access: { addressOf: (c) => c.req.header('x-test-address') },
    observer,
    stream,
  });
  const tokens: Partial<Record<Actor, string>> = { wrong: 't_0.wrong' };
  for (const role of TOKEN_ROLES) tokens[role] = (await createToken(ports, { lab: LOCAL_LAB, role, days: 999 })).token;
  tokens['other lab'] = (await createToken(ports, { lab: 'theirs', role: 'keeper', days: 999 })).token;

  const ask = (actor: Actor, method: string, path: string, body?: BodyInit, headers: Record<string, string> = {}) => {
    const token = tokens[actor];
    const own: Record<string, string> = { host: HOST, 'x-test-address': actor };
    if (token) own['authorization'] = `Bearer ${token}`;
    const app = actor === 'open' ? open : closed;
    return app.request(`http://${HOST}${path}`, { method, body, headers: { ...own, ...headers } });
  };
  const json = async (path: string): Promise<Body> => (await ask('open', 'GET', path)).json();

  const document = await json('/v1/openapi.json');
  const operations = operationsOf(document);
  const breach = createShapeCheck(document);

  let campaign = (await createCampaign(ports, 'trial')).id;
  let ids = await settle(ports, campaign, json);

  const outcome: RequestsOutcome = {
    requests: 0,
    failures: [],
    failureCount: 0,
    troubles,
    byStatus: new Map(),
    byActor: new Map(),
    documented: new Set(),
    met: new Set(),
  };
  for (const { method, route, operation } of operations)
    for (const status of Object.keys(operation.responses))
      if (Number(status) < 500) outcome.documented.add(`${method} ${route} ${status}`);
  const fail = (what: string) => {
    outcome.failureCount++;
    if (outcome.failures.length < FAILURES_TOLD) outcome.failures.push(what);
  };

  for (let n = 0; n < count; n++) {
    if (Math.floor(n / BLOCK) % 2 === 0) ports.clock.advance(STEP_MS);
    if (n % 2000 === 1999) {
      ports.clock.advance(120_000);
      // What the requests renamed or deleted is there again.
      await createCampaign(ports, 'spare').catch(() => undefined);
      campaign = ((await findCampaign(ports, campaign, LOCAL_LAB)) ?? (await createCampaign(ports, `trial ${n}`))).id;
      ids = await settle(ports, campaign, json);
    }
    const words = ['trial', campaign, 'A', 'films', '2', 'spare', ...FILE_PATHS];
    const actor = ACTORS[random.integer(ACTORS.length)];
    const target = operations[random.integer(operations.length)];
    const { path, body, headers } = await drawRequest(target, document, ids, words, random);
    const told = () =>
      `${actor}: ${target.method} ${path} ${typeof body === 'string' ? body.slice(0, 200) : ''} ${JSON.stringify(headers)}`;
    const response = await ask(actor, target.method.toUpperCase(), path, body, headers);
    outcome.requests++;
    outcome.byStatus.set(response.status, (outcome.byStatus.get(response.status) ?? 0) + 1);
    outcome.byActor.set(actor, (outcome.byActor.get(actor) ?? 0) + 1);
    outcome.met.add(`${target.method} ${target.route} ${response.status}`);
    const problem = await breachOf(target.operation, response, breach);
    if (problem) fail(`${told()}: ${problem}`);
  }
  return outcome;
}

/** Puts three scans, a broken file and one that no job can read in, runs the jobs and gives the ids that exist, by the word in the route. */
async function settle(
  ports: TestPorts,
  campaign: string,
  json: (path: string) => Promise<Body>,
): Promise<Record<string, string[]>> {
  for (const rate of [1, 2, 3]) await send(ports, campaign, `A/oven/${rate}.txt`, `rate ${rate}`);
  await send(ports, campaign, 'A/oven/bad.txt', 'bad scan');
  await send(ports, campaign, 'A/oven/poison.txt', 'poison');
  await drain(ports);
  const { samples } = await json(`/v1/campaigns/${campaign}/status`);
  const scans = [];
  for (const { id } of samples.slice(0, 2)) scans.push(...(await json(`/v1/samples/${id}`)).scans.slice(0, 3));
  const { instruments } = await json(`/v1/campaigns/${campaign}`);
  const jobs = [...(await json('/v1/jobs?state=failed')).items, ...(await json('/v1/jobs?limit=3')).items];
  const idOf = (thing: { id: string }) => thing.id;
  return {
    campaign: [campaign, campaign, 'spare'],
    sample: samples.map(idOf),
    scan: scans.map(idOf),
    instrument: instruments.map(idOf),
    job: jobs.map(idOf),
  };
}

interface DrawnRequest {
  path: string;
  body?: BodyInit;
  headers: Record<string, string>;
}

/** Mostly sensible: else nothing but refusals would be met. */
async function drawRequest(
  { method, route, operation }: DocumentedOperation,
  document: Body,
  ids: Record<string, string[]>,
  words: readonly string[],
  random: Random,
): Promise<DrawnRequest> {
  const oddShare = random.uniform() < 0.5 ? 0 : 0.25;
  const draw = (schema: Body) => drawValue(schema, document, random, words, oddShare);
  const kind = /^\/v1\/(\w+)s\//.exec(route)?.[1] ?? 'campaign';
  const known = method === 'delete' ? ['spare', 'films'] : (ids[kind] ?? []);
  const id = known.length > 0 && random.uniform() < 0.85 ? known[random.integer(known.length)] : String(draw({}));
  const query = new URLSearchParams();
  const headers: Record<string, string> = {};
  for (const p of operation.parameters ?? []) {
    if (random.uniform() > (p.required ? 0.95 : 0.3)) continue;
    const value = p.name === 'confirm' && random.uniform() < 0.7 ? id : String(draw(p.schema));
    if (p.in === 'query') query.append(p.name, value);
    // Header values are Latin-1 without line ends before any server sees them.
    if (p.in === 'header') headers[p.name] = /^[\x20-\x7e]*$/.test(value) ? value : 'x';
  }
  if ('if-none-match' in headers && random.uniform() < 0.5) headers['if-none-match'] = '*';
  if (random.uniform() < 0.03) query.append('unknown', '1');
  const content = operation.requestBody?.content ?? {};
  const [type] = Object.keys(content);
  const sent = type && random.uniform() < 0.97 ? await drawBody(type, content[type].schema, draw, random) : undefined;
  if (type && random.uniform() < 0.97) headers['content-type'] = sent?.type ?? type;
  if (sent && random.uniform() < 0.95) headers['content-length'] = String(sent.body.byteLength);
  if (random.uniform() < 0.01) headers['content-length'] = ['200000000', 'x', '-1'][random.integer(3)];
  if (random.uniform() < 0.01) headers['x-forwarded-for'] = '192.0.2.7';
  return { path: `${route.replace('{id}', encodeURIComponent(id))}?${query}`, body: sent?.body as BodyInit, headers };
}

async function drawBody(type: string, schema: Body, draw: (schema: Body) => unknown, random: Random) {
  const encode = (text: string) => new TextEncoder().encode(text);
  if (random.uniform() < 0.03) return { type, body: encode('{"cut') };
  if (type === 'application/json') return { type, body: encode(JSON.stringify(draw(schema))) };
  const text = `rate ${1 + random.integer(5)}`;
  if (type !== 'multipart/form-data') return { type, body: encode(text) };
  const form = new FormData();
  for (let k = random.integer(3); k >= 0; k--)
    form.append(random.uniform() < 0.9 ? 'files[]' : 'file', new File([text], FILE_PATHS[random.integer(5)]));
  const request = new Request('http://x/', { method: 'POST', body: form });
  return {
    type: request.headers.get('content-type') as string,
    body: new Uint8Array(await request.arrayBuffer()),
  };
}

/** What of an answer the document does not say, or undefined. */
async function breachOf(
  operation: Body,
  response: Response,
  breach: (schema: Body, value: unknown) => string | undefined,
): Promise<string | undefined> {
  const text = response.headers.get('content-type')?.startsWith('text/event-stream')
    ? await firstPiece(response)
    : await response.text();
  if (response.status >= 500) return `${response.status} ${text}`;
  const documented = operation.responses[response.status];
  if (!documented) return `status ${response.status} is not documented: ${text.slice(0, 300)}`;
  const [type] = (response.headers.get('content-type') ?? '').split(';');
  if (!documented.content) return text === '' ? undefined : `a body where none is documented: ${text.slice(0, 200)}`;
  const media = documented.content[type];
  if (!media) return `media type ${type} is not documented for ${response.status}`;
  if (type === 'text/csv') return unevenRecord(text);
  if (!/json/.test(type)) return typeof text === 'string' ? undefined : 'no body';
  const value = JSON.parse(text);
  const wrong = breach(media.schema, value);
  if (wrong) return `${response.status} breaks its shape: ${wrong}`;
  if (response.status >= 400 && !(value.type.split('#')[1] in media.examples))
    return `${value.type} is not listed under ${response.status}`;
  return undefined;
}

/** What a CSV has that is no table: another count of cells than its head. */
function unevenRecord(text: string): string | undefined {
  const [head, ...records] = csvRecords(text);
  if (!head || head.includes('')) return `no columns: ${text.slice(0, 200)}`;
  const odd = records.find((record) => record.length !== head.length);
  return odd && `${odd.length} cells under ${head.length} columns: ${odd.join(' | ').slice(0, 200)}`;
}

/** A stream goes on; what came first is enough. */
async function firstPiece(response: Response): Promise<string> {
  const reader = response.body!.getReader();
  const { value } = await reader.read();
  await reader.cancel();
  return new TextDecoder().decode(value);
}
