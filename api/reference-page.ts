import { FLAG_CODES } from '../schema/wire/flags.ts';
import { PROBLEMS } from './problems.ts';

/** The parts of the OpenAPI document that the page shows. */
interface Schema {
  type?: string | string[];
  enum?: unknown[];
  description?: string;
  format?: string;
  default?: unknown;
  minimum?: number;
  maximum?: number;
  maxLength?: number;
  $ref?: string;
  items?: Schema;
  properties?: Record<string, Schema>;
  required?: string[];
  anyOf?: Schema[];
}
interface Media {
  schema?: Schema;
  example?: unknown;
  examples?: Record<string, { value: unknown }>;
}
type Content = Record<string, Media>;
export interface Operation {
  operationId?: string;
  summary?: string;
  description?: string;
  parameters?: { name: string; in: string; required?: boolean; schema?: Schema; description?: string }[];
  requestBody?: { content: Content };
  responses: Record<string, { description: string; content?: Content }>;
  security?: Record<string, string[]>[];
}
export interface ApiDocument {
  info: { title: string; version: string; description?: string };
  paths?: Record<string, Record<string, Operation>>;
  components?: { schemas?: Record<string, Schema>; securitySchemes?: Record<string, object> };
}

export const REFERENCE_STYLE = `
:root{color-scheme:light dark}
body{font:16px/1.5 system-ui,sans-serif;max-width:60rem;margin:2rem auto;padding:0 1rem}
code{font-family:ui-monospace,monospace;font-size:.9em}
section{border-top:1px solid #8886;padding:.5rem 0 1rem}
h3{margin:.6rem 0 .2rem;font-size:1.05rem}
.method{display:inline-block;min-width:4.2rem;font-weight:700}
table{border-collapse:collapse;margin:.4rem 0;width:100%}
th,td{text-align:left;vertical-align:top;padding:.2rem .8rem .2rem 0;border-bottom:1px solid #8883}
th:first-child,td:first-child{width:11rem}
th:nth-child(2):not(:last-child),td:nth-child(2):not(:last-child){width:14rem}
nav a{margin-right:1rem}
pre{overflow-x:auto;font-size:.85em;background:#8882;padding:.5rem}
`;

const escapeText = (text: string): string =>
  text.replace(/[&<>"]/g, (c) => ({ '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;' })[c] as string);

/** Text of the document, where `…` marks code. */
const proseOf = (text: string): string => escapeText(text).replace(/`([^`]+)`/g, '<code>$1</code>');

/** A schema in one short line. */
function wordsOf(schema: Schema | undefined, depth = 0): string {
  if (!schema) return '';
  if (schema.$ref) {
    const name = schema.$ref.split('/').at(-1) ?? '';
    return `<a href="#shape-${escapeText(name)}">${escapeText(name)}</a>`;
  }
  if (schema.anyOf) return schema.anyOf.map((s) => wordsOf(s, depth)).join(' or ');
  if (schema.enum) return schema.enum.map((v) => `<code>${escapeText(JSON.stringify(v))}</code>`).join(' | ');
  if (schema.items) return `list of ${wordsOf(schema.items, depth)}`;
  if (schema.properties && depth < 4) {
    const fields = Object.entries(schema.properties).map(
      ([name, s]) => `<code>${escapeText(name)}</code>: ${wordsOf(s, depth + 1)}`,
    );
    return `{ ${fields.join(', ')} }`;
  }
  const range =
    schema.minimum !== undefined && schema.maximum !== undefined ? `, ${schema.minimum} to ${schema.maximum}` : '';
  const fallback = schema.default === undefined ? '' : `, ${JSON.stringify(schema.default)} unless given`;
  const type = Array.isArray(schema.type) ? schema.type.join(' or ') : (schema.type ?? 'anything');
  const length = schema.maxLength === undefined ? '' : `, at most ${schema.maxLength} characters`;
  return escapeText(`${type}${schema.format ? ` (${schema.format})` : ''}${length}${range}${fallback}`);
}

const bodyRows = (content: Content | undefined): string =>
  Object.entries(content ?? {})
    .map(([type, { schema }]) => `<code>${escapeText(type)}</code> ${wordsOf(schema)}`)
    .join('<br>');

/** The example of a body, as text to copy. */
const exampleOf = (content: Content | undefined): string =>
  Object.values(content ?? {})
    .filter(({ example }) => example !== undefined)
    .map(
      ({ example }) =>
        `<pre>${escapeText(typeof example === 'string' ? example : JSON.stringify(example, null, 2))}</pre>`,
    )
    .join('');

const isProblem = (status: string): boolean => Number(status) >= 400;

/** Codes of the problems that an operation may answer with. */
const refusalsOf = (responses: Operation['responses']): string =>
  Object.entries(responses)
    .filter(([status]) => isProblem(status))
    .map(([status, { content }]) => {
      const codes = Object.keys(Object.values(content ?? {})[0]?.examples ?? {});
      return `${status} ${codes.map((code) => `<a href="#${code}">${code}</a>`).join(', ')}`;
    })
    .join('; ');

function operationSection(path: string, method: string, operation: Operation): string {
  const parameters = (operation.parameters ?? [])
    .map(
      (p) =>
        `<tr><td><code>${escapeText(p.name)}</code></td><td>${escapeText(p.in)}${p.required ? ', required' : ''}</td><td>${wordsOf(p.schema)}. ${proseOf(p.description ?? '')}</td></tr>`,
    )
    .join('');
  const answers = Object.entries(operation.responses)
    .filter(([status]) => !isProblem(status))
    .map(
      ([status, r]) =>
        `<tr><td>${status}</td><td>${escapeText(r.description)}</td><td>${bodyRows(r.content)}</td></tr>`,
    )
    .join('');
  return `<section id="${operation.operationId}"><h3><span class="method">${method.toUpperCase()}</span> <code>${escapeText(path)}</code></h3>
<p>${proseOf(operation.summary ?? '')} ${proseOf(operation.description ?? '')}</p>
${parameters ? `<table><tr><th>parameter</th><th>in</th><th>takes</th></tr>${parameters}</table>` : ''}
${operation.requestBody ? `<p>Body: ${bodyRows(operation.requestBody.content)}</p>` : ''}
${exampleOf(operation.requestBody?.content)}
<table><tr><th>answer</th><th></th><th></th></tr>${answers}</table>
${Object.values(operation.responses)
  .map(({ content }) => exampleOf(content))
  .join('')}
<p>Refused with: ${refusalsOf(operation.responses)}.</p></section>`;
}

/** The readable reference: one page without script or network, from the same document that programs read. */
export function renderReference(document: ApiDocument): string {
  const operations = Object.entries(document.paths ?? {})
    .flatMap(([path, methods]) => Object.entries(methods).map(([m, o]) => operationSection(path, m, o)))
    .join('\n');
  const shapes = Object.entries(document.components?.schemas ?? {})
    .map(
      ([name, s]) =>
        `<section id="shape-${escapeText(name)}"><h3>${escapeText(name)}</h3><table>${Object.entries(s.properties ?? {})
          .map(
            ([field, f]) =>
              `<tr><td><code>${escapeText(field)}</code></td><td>${wordsOf(f)}</td><td>${proseOf(f.description ?? '')}</td></tr>`,
          )
          .join('')}</table></section>`,
    )
    .join('\n');
  const problems = Object.entries(PROBLEMS)
    .map(
      ([code, [status, title, action]]) =>
        `<tr id="${code}"><td><code>${code}</code></td><td>${status}</td><td>${escapeText(title)}</td><td>${escapeText(action)}</td></tr>`,
    )
    .join('');
  const flags = Object.entries(FLAG_CODES)
    .map(
      ([code, [severity, meaning]]) =>
        `<tr id="flag-${code}"><td><code>${code}</code></td><td>${severity}</td><td>${escapeText(meaning)}</td></tr>`,
    )
    .join('');
  return `<!doctype html>
<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width,initial-scale=1">
<title>${escapeText(document.info.title)} reference</title><style>${REFERENCE_STYLE}</style></head><body>
<h1>${escapeText(document.info.title)} ${escapeText(document.info.version)}</h1>
<p>${escapeText(document.info.description ?? '')}</p>
<nav><a href="#routes">Routes</a><a href="#shapes">Shapes</a><a href="#problems">Problems</a><a href="#flags">Flags</a><a href="/v1/openapi.json">OpenAPI document</a></nav>
<h2 id="routes">Routes</h2>${operations}
<h2 id="shapes">Shapes</h2>${shapes}
<h2 id="problems">Problems</h2><table><tr><th>code</th><th>status</th><th>meaning</th><th>what to do</th></tr>${problems}</table>
<h2 id="flags">Flags</h2><table><tr><th>code</th><th>severity</th><th>meaning</th></tr>${flags}</table>
</body></html>
`;
}
