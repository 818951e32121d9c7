import { csvHeader, csvRow, type ResultTable } from '../schema/wire/result-tables.ts';

/** Text is handed on in pieces of about this many characters. */
const PIECE = 16_384;

/** A result table as CSV, read while it is sent: never whole in memory. Same bytes as the file of `run`. */
export function csvStream(
  table: ResultTable,
  rows: AsyncIterable<Record<string, unknown>>,
): ReadableStream<Uint8Array> {
  const encoder = new TextEncoder();
  const iterator = rows[Symbol.asyncIterator]();
  let text = csvHeader(table);
  return new ReadableStream({
    async pull(controller) {
      let done: boolean | undefined = false;
      while (!done && text.length < PIECE) {
        const next = await iterator.next();
        done = next.done;
        if (!next.done) text += csvRow(table, next.value);
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
