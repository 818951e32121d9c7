/** The central directory of a zip file (PKWARE APPNOTE 6.3, sections 4.3–4.4). It, not the local headers, says what the archive holds. */

export interface ZipEntry {
  name: string;
  isDirectory: boolean;
  encrypted: boolean;
  /** 0 stored, 8 deflated */
  method: number;
  crc: number;
  packedBytes: number;
  /** As stated; checked while inflating */
  unpackedBytes: number;
  /** Offset of the local header */
  offset: number;
}

const END_SIGNATURE = 0x06054b50;
const ENTRY_SIGNATURE = 0x02014b50;
const LOCAL_SIGNATURE = 0x04034b50;
const END_BYTES = 22;
const ENTRY_BYTES = 46;
const LOCAL_BYTES = 30;
/** A zip comment has at most so many bytes. */
const COMMENT_LIMIT = 65_535;
/** A 32-bit field that says: look in the 64-bit extension. */
const IN_EXTENSION = 0xffffffff;

/** Upper half of code page 437, the names of old zip files (APPNOTE appendix D). */
const CODE_PAGE_437 =
  'ÇüéâäàåçêëèïîìÄÅÉæÆôöòûùÿÖÜ¢£¥₧ƒáíóúñÑªº¿⌐¬½¼¡«»░▒▓│┤╡╢╖╕╣║╗╝╜╛┐└┴┬├─┼╞╟╚╔╩╦╠═╬╧╨╤╥╙╘╒╓╫╪┘┌█▄▌▐▀αßΓπΣσµτΦΘΩδ∞φε∩≡±≥≤⌠⌡÷≈°∙·√ⁿ²■\u00a0';

/** Entries in the order of the directory. Throws an Error with a plain message when there is no whole directory. */
export function readZipDirectory(bytes: Uint8Array): ZipEntry[] {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const end = findEnd(view);
  const count = view.getUint16(end + 10, true);
  const size = view.getUint32(end + 12, true);
  const offset = view.getUint32(end + 16, true);
  if (count === 0xffff || offset === IN_EXTENSION) throw new Error('it has more than 65 534 entries or 4 GB (zip64)');
  if (view.getUint16(end + 4, true) !== 0) throw new Error('it is one part of an archive in several parts');
  // Bytes before the archive proper (a self-extracting one) shift every offset.
  const shift = end - size - offset;
  if (shift < 0) throw new Error('its directory lies outside the file: the copy is incomplete');
  const entries: ZipEntry[] = [];
  let at = offset + shift;
  for (let i = 0; i < count; i++) {
    if (at + ENTRY_BYTES > end || view.getUint32(at, true) !== ENTRY_SIGNATURE)
      throw new Error(`entry ${i + 1} of ${count} of its directory is damaged`);
    const flags = view.getUint16(at + 8, true);
    const nameBytes = view.getUint16(at + 28, true);
    const name = decodeName(bytes.subarray(at + ENTRY_BYTES, at + ENTRY_BYTES + nameBytes), (flags & 0x800) !== 0);
    entries.push({
      name,
      isDirectory: name.endsWith('/'),
      encrypted: (flags & 1) !== 0,
      method: view.getUint16(at + 10, true),
      crc: view.getUint32(at + 16, true),
      packedBytes: view.getUint32(at + 20, true),
      unpackedBytes: view.getUint32(at + 24, true),
      offset: view.getUint32(at + 42, true) + shift,
    });
    at += ENTRY_BYTES + nameBytes + view.getUint16(at + 30, true) + view.getUint16(at + 32, true);
  }
  return entries;
}

/** The packed bytes of an entry. Throws an Error with a plain message when they are not there. */
export function packedBytesOf(bytes: Uint8Array, entry: ZipEntry): Uint8Array {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (entry.offset + LOCAL_BYTES > bytes.length || view.getUint32(entry.offset, true) !== LOCAL_SIGNATURE)
    throw new Error('its header in the archive is damaged');
  const start =
    entry.offset + LOCAL_BYTES + view.getUint16(entry.offset + 26, true) + view.getUint16(entry.offset + 28, true);
  if (start + entry.packedBytes > bytes.length) throw new Error('its bytes in the archive are cut');
  return bytes.subarray(start, start + entry.packedBytes);
}

function findEnd(view: DataView): number {
  const last = view.byteLength - END_BYTES;
  for (let at = last; at >= 0 && at >= last - COMMENT_LIMIT; at--)
    if (view.getUint32(at, true) === END_SIGNATURE && at + END_BYTES + view.getUint16(at + 20, true) <= view.byteLength)
      return at;
  throw new Error('it has no directory at its end: not a zip archive, or the copy is incomplete');
}

/** UTF-8 where the entry says so or the bytes are valid UTF-8, else code page 437; Unicode form NFC, since some systems store names decomposed. */
function decodeName(bytes: Uint8Array, isUtf8: boolean): string {
  try {
    return new TextDecoder('utf-8', { fatal: !isUtf8 }).decode(bytes).normalize('NFC');
  } catch {
    return Array.from(bytes, (byte) => (byte < 128 ? String.fromCharCode(byte) : CODE_PAGE_437[byte - 128])).join('');
  }
}
