/**
 * A blob of named Float64 columns with a JSON head: what steps pass to each other.
 * Layout: 8 bytes magic, uint32 LE head length, head (UTF-8 JSON, padded with spaces to a multiple of 8 with the 12 bytes before), columns back to back, little endian.
 */
const MAGIC = 'RSPCOL01';

export interface Columns {
  meta: unknown;
  columns: Record<string, Float64Array>;
}

export function encodeColumns({ meta, columns }: Columns): Uint8Array {
  const names = Object.keys(columns);
  const head = { meta, columns: names.map((name) => [name, columns[name].length] as const) };
  let text = new TextEncoder().encode(JSON.stringify(head));
  const padded = Math.ceil((text.length + 12) / 8) * 8 - 12;
  const spaces = new Uint8Array(padded).fill(0x20);
  spaces.set(text);
  text = spaces;
  const total = 12 + padded + names.reduce((sum, name) => sum + columns[name].byteLength, 0);
  const out = new Uint8Array(total);
  out.set(new TextEncoder().encode(MAGIC));
  new DataView(out.buffer).setUint32(8, padded, true);
  out.set(text, 12);
  let at = 12 + padded;
  for (const name of names) {
    const c = columns[name];
    out.set(new Uint8Array(c.buffer, c.byteOffset, c.byteLength), at);
    at += c.byteLength;
  }
  return out;
}

export function decodeColumns(bytes: Uint8Array): Columns {
  const magic = new TextDecoder().decode(bytes.subarray(0, 8));
  if (magic !== MAGIC) throw new RangeError(`not a column blob: starts with ${JSON.stringify(magic)}, not ${MAGIC}`);
  const length = new DataView(bytes.buffer, bytes.byteOffset).getUint32(8, true);
  const head = JSON.parse(new TextDecoder().decode(bytes.subarray(12, 12 + length))) as {
    meta: unknown;
    columns: [string, number][];
  };
  const columns: Record<string, Float64Array> = {};
  let at = 12 + length;
  for (const [name, n] of head.columns) {
    // A copy, so that the alignment of the blob in its buffer does not matter; `slice` would be a view where the bytes are a Node buffer.
    columns[name] = new Float64Array(new Uint8Array(bytes.subarray(at, at + n * 8)).buffer);
    at += n * 8;
  }
  if (at !== bytes.byteLength) throw new RangeError(`a column blob of ${at} bytes has ${bytes.byteLength}`);
  return { meta: head.meta, columns };
}
