import type { Random } from '../../jobs/numeric/random.ts';
import type { Body } from './harness.ts';

/** One operation of the document: where it lies and what it says of itself. */
export interface DocumentedOperation {
  method: string;
  route: string;
  operation: Body;
}

export const operationsOf = (document: Body): DocumentedOperation[] =>
  Object.entries<Body>(document.paths).flatMap(([route, methods]) =>
    Object.entries<Body>(methods).map(([method, operation]) => ({ route, method, operation })),
  );

const REFERENCE = /^#\/components\/schemas\/(.+)$/;

/** Never right where a schema asks for something. */
const ODD: readonly unknown[] = [
  null,
  '',
  -1,
  1e308,
  0.1,
  true,
  [],
  {},
  'a'.repeat(300),
  `'"\\;--`,
  '\u0000',
  '💥',
  [[[]]],
  { a: { b: 1 } },
];

/** A value that a request may hold, right or wrong, drawn from a schema of the document; text comes from `words`. */
export function drawValue(
  schema: Body,
  document: Body,
  random: Random,
  words: readonly string[],
  oddShare = 0.3,
  depth = 0,
): unknown {
  const draw = (inner: Body) => drawValue(inner, document, random, words, oddShare, depth + 1);
  const named = REFERENCE.exec(schema?.$ref ?? '')?.[1];
  if (named) return draw(document.components.schemas[named]);
  if (random.uniform() < oddShare) return ODD[random.integer(ODD.length)];
  if (schema?.enum) return schema.enum[random.integer(schema.enum.length)];
  if (schema?.anyOf) return draw(schema.anyOf[random.integer(schema.anyOf.length)]);
  if (schema?.prefixItems) return schema.prefixItems.map(draw);
  if (schema?.properties && depth < 4) {
    const required: string[] = schema.required ?? [];
    const entries = Object.entries<Body>(schema.properties).filter(
      ([name]) => random.uniform() < (required.includes(name) ? 0.95 : 0.4),
    );
    return Object.fromEntries(entries.map(([name, inner]) => [name, draw(inner)]));
  }
  if (schema?.items && depth < 4)
    return Array.from({ length: (schema.minItems ?? 0) + random.integer(3) }, () => draw(schema.items));
  const types = [schema?.type].flat();
  const type = types[random.integer(types.length)];
  if (type === 'number' || type === 'integer') {
    if (schema.exclusiveMaximum === 1) return [0.01, 0.5, 0.9, 1][random.integer(4)];
    return [0, 1, 2, 500, 1e6, -273.15, 1.5][random.integer(7)];
  }
  if (type === 'boolean') return random.uniform() < 0.5;
  if (type === 'null') return null;
  return words[random.integer(words.length)];
}
