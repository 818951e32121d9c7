/** Character encodings of instrument text: found from the first bytes, brought to one byte stream in which digits and delimiters are ASCII. */
export interface TextEncoding {
  name: 'UTF-8' | 'UTF-16 LE' | 'UTF-16 BE' | 'Latin-1';
  /** Bytes of a byte-order mark to leave out at the start of the file. */
  markLength: number;
}

/** Bytes looked at for the pattern of zero bytes that UTF-16 without a mark shows. */
const PATTERN_BYTES = 1024;

/**
 * Finds the encoding from the head of a file. UTF-16 without a byte-order mark is known by its zero bytes (text of Latin script
 * has one in nearly every second place); bytes that are not UTF-8 are Latin-1, where every byte has a
 * meaning (° is B0, µ is B5). A ° or µ written as UTF-8 (C2 B0, C2 B5) decides for UTF-8 even beside damaged bytes: in Latin-1 it would read Â°.
 */
export function detectEncoding(head: Uint8Array): TextEncoding {
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return { name: 'UTF-8', markLength: 3 };
  if (head[0] === 0xff && head[1] === 0xfe) return { name: 'UTF-16 LE', markLength: 2 };
  if (head[0] === 0xfe && head[1] === 0xff) return { name: 'UTF-16 BE', markLength: 2 };
  const pairs = Math.min(head.length, PATTERN_BYTES) >> 1;
  let evenZeros = 0;
  let oddZeros = 0;
  for (let i = 0; i < pairs; i++) {
    if (head[2 * i] === 0) evenZeros++;
    if (head[2 * i + 1] === 0) oddZeros++;
  }
  if (pairs >= 2 && oddZeros > 0.7 * pairs && evenZeros < 0.05 * pairs) return { name: 'UTF-16 LE', markLength: 0 };
  if (pairs >= 2 && evenZeros > 0.7 * pairs && oddZeros < 0.05 * pairs) return { name: 'UTF-16 BE', markLength: 0 };
  // Most heads are decided by their first byte above ASCII, or hold none: no text is made for those.
  const at = head.findIndex((byte) => byte > 127);
  if (at < 0 || (head[at] === 0xc2 && (head[at + 1] === 0xb0 || head[at + 1] === 0xb5)))
    return { name: 'UTF-8', markLength: 0 };
  // `stream` lets a character cut by the end of the head pass.
  const text = new TextDecoder('utf-8').decode(head, { stream: true });
  if (!text.includes('\ufffd') || /[°µ]/.test(text)) return { name: 'UTF-8', markLength: 0 };
  return { name: 'Latin-1', markLength: 0 };
}

/** Turns UTF-16 chunks (cut anywhere) into UTF-8 chunks; undefined for encodings whose bytes can be parsed as they are. */
export function createTranscoder(
  encoding: TextEncoding,
): ((chunk: Uint8Array, last: boolean) => Uint8Array) | undefined {
  if (encoding.name !== 'UTF-16 LE' && encoding.name !== 'UTF-16 BE') return undefined;
  const decoder = new TextDecoder(encoding.name === 'UTF-16 LE' ? 'utf-16le' : 'utf-16be', { ignoreBOM: true });
  const encoder = new TextEncoder();
  return (chunk, last) => encoder.encode(decoder.decode(chunk, { stream: !last }));
}

/** Decoder of bytes as the parser sees them (after `createTranscoder`); making one costs more than a line's text. */
export function textDecoder(encoding: TextEncoding): TextDecoder {
  return new TextDecoder(encoding.name === 'Latin-1' ? 'latin1' : 'utf-8', { ignoreBOM: true });
}

export function decodeText(bytes: Uint8Array, encoding: TextEncoding): string {
  return textDecoder(encoding).decode(bytes);
}

/** A whole small file (a sheet) as text, without its byte-order mark. */
export function decodeFile(bytes: Uint8Array): string {
  const encoding = detectEncoding(bytes);
  const body = bytes.subarray(encoding.markLength);
  const transcode = createTranscoder(encoding);
  return decodeText(transcode === undefined ? body : transcode(body, true), encoding);
}
