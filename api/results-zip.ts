import { Zip, ZipDeflate } from 'fflate';
import type { Ports } from '../jobs/ports/index.ts';
import { readCurrentTable } from '../jobs/store/index.ts';
import { RESULT_TABLES, type ResultTable } from '../schema/wire/result-tables.ts';
import { csvStream } from './csv-stream.ts';

/** Every entry bears the same date, so that the same results are the same bytes. */
const ENTRY_DATE = new Date(1980, 0, 1);

export interface ZipEntry {
  name: string;
  body: () => ReadableStream<Uint8Array>;
}

/** The result tables as the files that `run` writes. */
export const tableEntries = (ports: Ports, campaignId: string): ZipEntry[] =>
  (Object.keys(RESULT_TABLES) as ResultTable[]).map((table) => ({
    name: `${table}.csv`,
    body: () => csvStream(RESULT_TABLES[table], readCurrentTable(ports, campaignId, table)),
  }));

/** A zip archive made while it is sent: one entry is open at a time, none is whole in memory. */
export function zipStream(entries: readonly ZipEntry[]): ReadableStream<Uint8Array> {
  const pieces = zipPieces(entries);
  return new ReadableStream({
    async pull(controller) {
      const next = await pieces.next();
      if (next.done) controller.close();
      else controller.enqueue(next.value);
    },
    async cancel() {
      await pieces.return(undefined);
    },
  });
}

async function* zipPieces(entries: readonly ZipEntry[]): AsyncGenerator<Uint8Array, void, undefined> {
  const ready: Uint8Array[] = [];
  const zip = new Zip((error, piece) => {
    if (error) throw error;
    if (piece.length > 0) ready.push(piece);
  });
  const take = () => ready.splice(0);
  for (const { name, body } of entries) {
    const entry = new ZipDeflate(name, { level: 6 });
    entry.mtime = ENTRY_DATE;
    zip.add(entry);
    for await (const chunk of body() as unknown as AsyncIterable<Uint8Array>) {
      entry.push(chunk);
      yield* take();
    }
    entry.push(new Uint8Array(0), true);
    yield* take();
  }
  zip.end();
  yield* take();
}
