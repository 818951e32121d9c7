import { decodeColumns, encodeColumns } from './columns.ts';

/** Stands in the JSON head for an array that is a column. */
interface Place {
  $column: string;
}

const isPlace = (value: object): value is Place => '$column' in value;

/** A JSON value whose Float64Arrays, at any depth, become columns of the blob. Numbers that are not finite become null, as in JSON. */
export function encodePacked(value: unknown): Uint8Array {
  const columns: Record<string, Float64Array> = {};
  const place = (_key: string, inner: unknown): unknown => {
    if (!(inner instanceof Float64Array)) return inner;
    const name = String(Object.keys(columns).length);
    columns[name] = inner;
    return { $column: name } satisfies Place;
  };
  const meta = JSON.parse(JSON.stringify(value, place)) as unknown;
  return encodeColumns({ meta, columns });
}

/** The inverse of `encodePacked`. Throws RangeError for bytes that are no such blob. */
export function decodePacked<T>(bytes: Uint8Array): T {
  const { meta, columns } = decodeColumns(bytes);
  const fill = (value: unknown): unknown => {
    if (Array.isArray(value)) return value.map(fill);
    if (value === null || typeof value !== 'object') return value;
    if (isPlace(value)) return columns[value.$column];
    return Object.fromEntries(Object.entries(value).map(([key, inner]) => [key, fill(inner)]));
  };
  return fill(meta) as T;
}
