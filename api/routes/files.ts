import { createRoute, z } from '@hono/zod-openapi';
import type { Context } from 'hono';
import type { Ports } from '../../jobs/ports/index.ts';
import { FILE_LIMIT_BYTES, receiveFile } from '../../jobs/store/index.ts';
import { quote } from '../../schema/wire/flags.ts';
import type { ApiEnv } from '../access.ts';
import { answerCsv, byIdOrCsv, columnsOf, orCsv } from '../csv-lists.ts';
import { type ApiApp, answersOf, ID_PARAM, listOf, strict } from '../openapi.ts';
import { Problem } from '../problems.ts';
import { requireCampaign } from '../results.ts';
import { ReceivedShape } from '../shapes/campaign.ts';

/** A form is held in memory whole: small ones only. */
const FORM_LIMIT = 8e6;
const FORM_FILES = 50;

const putRoute = createRoute({
  method: 'put',
  path: '/v1/campaigns/{id}/files',
  summary: 'Send one file: a scan, a sheet, or a .gz or .zip of them.',
  description:
    'Raw body with Content-Length, at most 100 MB. The jobs decide later what the bytes are worth; the same bytes again are `known`, other bytes under the same path replace the older ones.',
  request: {
    params: ID_PARAM,
    query: strict({
      path: z.string({ error: 'a relative path' }).openapi({
        description: 'Where the file lies in the campaign folder, e.g. SAMPLE/INSTRUMENT/a.txt.',
      }),
    }),
    body: { content: { 'application/octet-stream': { schema: { type: 'string', format: 'binary' } } } },
  },
  responses: answersOf(202, ReceivedShape, 'What became of the file.'),
});

const formRoute = createRoute({
  method: 'post',
  path: '/v1/campaigns/{id}/scans',
  summary: 'Send a handful of files as a form: at most 50 files and 8 MB.',
  description: 'Field `files[]`, once a file; the file name is its path. A refused file does not hold up the others.',
  request: {
    ...byIdOrCsv('what became of each file'),
    body: {
      content: {
        'multipart/form-data': {
          schema: {
            type: 'object',
            properties: { 'files[]': { type: 'array', items: { type: 'string', format: 'binary' } } },
          },
        },
      },
    },
  },
  responses: orCsv(answersOf(202, listOf(ReceivedShape), 'What became of each file.')),
});

type ApiContext = Context<ApiEnv>;

/** Content-Length, checked before a byte of the body is read. */
function declaredLength(c: ApiContext, limit: number): number {
  const written = c.req.header('content-length');
  if (written === undefined || !/^\d+$/.test(written))
    throw new Problem('length-required', `Content-Length is ${written === undefined ? 'missing' : quote(written)}`);
  const length = Number(written);
  if (length > limit) throw new Problem('too-large', `the body has ${length} bytes; at most ${limit} are taken`);
  return length;
}

/** A broken percent code would otherwise pass through as text and become part of a file name. */
function refuseBrokenEscapes(url: string): void {
  try {
    decodeURIComponent(new URL(url).search.replaceAll('+', ' '));
  } catch {
    throw new Problem('bad-path', 'the path holds a percent code that is not UTF-8', { field: 'path' });
  }
}

async function readForm(c: ApiContext): Promise<File[]> {
  const type = c.req.header('content-type') ?? '';
  if (!/^multipart\/form-data\s*;/i.test(type))
    throw new Problem('media-type-refused', `Content-Type is ${quote(type)}; allowed: multipart/form-data`);
  let form: FormData;
  try {
    form = await c.req.raw.formData();
  } catch {
    throw new Problem('malformed-form', 'the body could not be read as multipart/form-data');
  }
  const files: File[] = [];
  for (const [field, value] of form) {
    if (field !== 'files[]' || typeof value === 'string')
      throw new Problem('invalid-input', `body: ${quote(field)} is not known; known: files[] with files`, { field });
    files.push(value);
  }
  if (files.length === 0 || files.length > FORM_FILES)
    throw new Problem('invalid-input', `body: ${files.length} files in files[]; allowed: 1 to ${FORM_FILES}`, {
      field: 'files[]',
    });
  return files;
}

export function addFileRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(putRoute, async (c) => {
    refuseBrokenEscapes(c.req.url);
    const { path } = c.req.valid('query');
    const problem = ports.paths.problem(path);
    if (problem) throw new Problem('bad-path', problem, { file: path, field: 'path' });
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    const length = declaredLength(c, FILE_LIMIT_BYTES);
    return c.json(await receiveFile(ports, campaign.id, path, c.req.raw.body ?? new Uint8Array(), length), 202);
  });

  app.openapi(formRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    declaredLength(c, FORM_LIMIT);
    const items: z.infer<typeof ReceivedShape>[] = [];
    for (const file of await readForm(c))
      items.push(await receiveFile(ports, campaign.id, file.name, file.stream(), file.size));
    if (c.req.valid('query').format === 'csv') return answerCsv(c, 'files', columnsOf(ReceivedShape), items, 202);
    return c.json({ items, next: null }, 202);
  });
}
