import { type Cell, csvCell } from '../schema/wire/result-tables.ts';

/** Text is handed on in pieces of about this many characters. */
const PIECE = 16_384;

/** What stands in a column `a.b`: field b of the object in field a. */
function valueAt(row: unknown, path: readonly string[]): unknown {
  let value = row;
  for (const field of path) value = (value as Record<string, unknown> | null | undefined)?.[field];
  return value;
}

/** A list of plain values as the tables write it, joined by `;`. A list of anything else, or an object of no fixed fields, as JSON. */
function cellOf(value: unknown): string {
  const isNested = (v: unknown) => typeof v === 'object' && v !== null;
  if (typeof value === 'boolean') return String(value);
  if (!isNested(value) || (Array.isArray(value) && !value.some(isNested))) return csvCell(value as Cell);
  return csvCell(JSON.stringify(value));
}

/**
 * Rows as CSV (RFC 4180, lines ended by LF), read while they are sent: never whole in memory. Of a result table the same bytes as the file of
 * `run`.
 */
export function csvStream(
  columns: readonly string[],
  rows: AsyncIterable<unknown> | Iterable<unknown>,
): ReadableStream<Uint8Array> {
  const encoder = new TextEncoder();
  const paths = columns.map((column) => column.split('.'));
  const iterator = Symbol.asyncIterator in rows ? rows[Symbol.asyncIterator]() : rows[Symbol.iterator]();
  let text = `${columns.join(',')}\n`;
  return new ReadableStream({
    async pull(controller) {
      let done: boolean | undefined = false;
      while (!done && text.length < PIECE) {
        const next = await iterator.next();
        done = next.done;
        if (!next.done) text += `${paths.map((path) => cellOf(valueAt(next.value, path))).join(',')}\n`;
      }
      if (text) controller.enqueue(encoder.encode(text));
      text = '';
      if (done) controller.close();
    },
    async cancel() {
      await iterator.return?.();
    },
  });
}
