/** Telling bytes that are no text, and what they may be instead. */

/** First bytes of file forms in common use (their public specifications: PKWARE APPNOTE 4.3.7, RFC 1952, ISO 32000-1, PNG/ISO 15948, Compound File Binary). */
const SIGNATURES: readonly [bytes: readonly number[], kind: string][] = [
  [[0x50, 0x4b, 0x03, 0x04], 'a zip archive or a workbook'],
  [[0x1f, 0x8b], 'gzip data'],
  [[0x25, 0x50, 0x44, 0x46], 'a PDF document'],
  [[0x89, 0x50, 0x4e, 0x47], 'a PNG picture'],
  [[0xd0, 0xcf, 0x11, 0xe0], 'a compound document (an old workbook or a project file)'],
];
const LOOKED_AT = 4096;
/** Share of control characters above which bytes are no text. */
const CONTROL_SHARE = 0.02;

/** What binary form the bytes (already without UTF-16) have, or undefined when they can be text. */
export function binaryKind(head: Uint8Array): string | undefined {
  const known = SIGNATURES.find(([bytes]) => bytes.every((byte, i) => head[i] === byte));
  if (known !== undefined) return known[1];
  const length = Math.min(head.length, LOOKED_AT);
  let controls = 0;
  for (let i = 0; i < length; i++) {
    if (head[i] === 0) return 'binary data';
    // Tab to carriage return are text; 1A ends files of old systems.
    if (head[i] < 9 || (head[i] > 13 && head[i] < 32 && head[i] !== 0x1a)) controls++;
  }
  return controls > CONTROL_SHARE * length ? 'binary data' : undefined;
}
