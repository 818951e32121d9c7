import { operationsOf } from '../api/draw-request.ts';
import type { Body } from '../api/harness.ts';

/** A schema of the document as a TypeScript type. */
function typeOf(schema: Body): string {
  if (schema.$ref) return schema.$ref.split('/').at(-1);
  if (schema.anyOf) return schema.anyOf.map(typeOf).join(' | ');
  if (schema.enum) return schema.enum.map((v: unknown) => (v === null ? 'null' : `'${v}'`)).join(' | ');
  if (schema.const !== undefined) return `'${schema.const}'`;
  if (Array.isArray(schema.type)) return schema.type.map((type: string) => typeOf({ ...schema, type })).join(' | ');
  if (schema.prefixItems) return `[${schema.prefixItems.map(typeOf).join(', ')}]`;
  if (schema.type === 'array') return `(${typeOf(schema.items)})[]`;
  if (schema.type === 'integer') return 'number';
  if (schema.properties && Object.keys(schema.properties).length > 0) {
    const required: string[] = schema.required ?? [];
    const fields = Object.entries<Body>(schema.properties).map(([name, inner]) => {
      const text = inner.description ? `/** ${inner.description} */\n` : '';
      return `${text}${JSON.stringify(name)}${required.includes(name) ? '' : '?'}: ${typeOf(inner)};`;
    });
    return `{ ${fields.join('\n')} }`;
  }
  if (schema.additionalProperties && typeof schema.additionalProperties === 'object')
    return `Record<string, ${typeOf(schema.additionalProperties)}>`;
  return schema.type === 'object' ? 'Record<string, unknown>' : schema.type;
}

function bodyOf(content: Body): string {
  if (!content) return 'undefined';
  if (content['application/json']) return typeOf(content['application/json'].schema);
  return content['multipart/form-data'] ? 'FormData' : 'Blob | Uint8Array<ArrayBuffer> | string';
}

/** JSON as what it holds, anything else as the answer itself. */
function answerOf(responses: Body): string {
  const [, answer] = Object.entries<Body>(responses).find(([status]) => Number(status) < 300)!;
  if (!answer.content) return 'undefined';
  const json = answer.content['application/json'];
  return json ? typeOf(json.schema) : 'Response';
}

function queryOf(parameters: Body[]): string {
  const inQuery = parameters.filter((p) => p.in === 'query');
  if (inQuery.length === 0) return 'undefined';
  const fields = inQuery.map((p) => `${p.name}${p.required ? '' : '?'}: ${typeOf(p.schema)};`);
  return `{ ${fields.join(' ')} }`;
}

/** Types of everything that the API takes and gives, and the list of its operations, from its OpenAPI document. */
export function clientTypes(document: Body): string {
  const shapes = Object.entries<Body>(document.components.schemas).map(([name, schema]) => {
    const text = schema.description ? `/** ${schema.description} */\n` : '';
    return `${text}export interface ${name} ${typeOf(schema)}`;
  });
  const operations = operationsOf(document);
  const types = operations.map(
    ({ route, operation }) =>
      `/** ${operation.summary} */\n${operation.operationId}: { id: ${route.includes('{id}') ? 'string' : 'undefined'}; query: ${queryOf(operation.parameters)}; body: ${bodyOf(operation.requestBody?.content)}; answer: ${answerOf(operation.responses)} };`,
  );
  const list = operations.map(
    ({ method, route, operation }) => `${operation.operationId}: ['${method.toUpperCase()}', '${route}'],`,
  );
  return [
    '// Written by `npm run client-types` from the OpenAPI document, and held to it by test/docs.',
    ...shapes,
    `/** Every operation by its name: the id in its path, its query, its body and its answer. */\nexport interface Operations { ${types.join('\n')} }`,
    `/** Method and route of every operation. */\nexport const OPERATIONS = { ${list.join('\n')} } as const satisfies Record<keyof Operations, readonly [string, string]>;`,
    '',
  ].join('\n\n');
}
