import { z } from '@hono/zod-openapi';
import type { Body } from './harness.ts';

/** Objects that list their properties take no others: a key that the document does not name is a defect of the document. */
function tighten(schema: Body): Body {
  if (Array.isArray(schema)) return schema.map(tighten);
  if (schema === null || typeof schema !== 'object') return schema;
  const out = Object.fromEntries(Object.entries(schema).map(([key, value]) => [key, tighten(value)]));
  if (typeof out['$ref'] === 'string') out['$ref'] = out['$ref'].replace('#/components/schemas/', '#/$defs/');
  const properties = schema.properties as object | undefined;
  if (
    schema.type === 'object' &&
    properties &&
    Object.keys(properties).length > 0 &&
    !('additionalProperties' in schema)
  )
    out['additionalProperties'] = false;
  return out;
}

/** Holds values to the JSON schemas of an OpenAPI document, read by Zod's own reader of JSON Schema. */
export function createShapeCheck(document: Body): (schema: Body, value: unknown) => string | undefined {
  const $defs = tighten(document.components.schemas);
  const known = new Map<Body, z.ZodType>();
  return (schema, value) => {
    let parser = known.get(schema);
    if (!parser) {
      parser = z.fromJSONSchema({ ...tighten(schema), $defs }) as unknown as z.ZodType;
      known.set(schema, parser);
    }
    const result = parser.safeParse(value);
    return result.success ? undefined : z.prettifyError(result.error).replaceAll('\n', ' ');
  };
}
