/** gzip data (RFC 1952), one member or several in a row. */
import { Gunzip } from 'fflate';
import { type Budget, crc32, joined, STEP_BYTES } from './inflate.ts';

/**
 * Unpacks gzip data; length and, for a single member, checksum are held against the trailer.
 * Throws an Error with a plain message when the data are damaged or cut, ArchiveRefused when a limit is passed.
 */
export function gunzipLimited(packed: Uint8Array, budget: Budget): Uint8Array {
  if (packed.length < 18 || packed[0] !== 0x1f || packed[1] !== 0x8b) throw new Error('it is not gzip data');
  const parts: Uint8Array[] = [];
  let produced = 0;
  let memberStart = 0;
  const stream = new Gunzip((chunk) => {
    if (chunk.length === 0) return;
    produced += chunk.length;
    parts.push(chunk);
  });
  stream.onmember = () => {
    memberStart = produced;
  };
  for (let at = 0; at < packed.length; at += STEP_BYTES) {
    const end = Math.min(at + STEP_BYTES, packed.length);
    stream.push(packed.subarray(at, end), end === packed.length);
    budget.check(produced, end);
  }
  const whole = joined(parts, produced);
  const trailer = new DataView(packed.buffer, packed.byteOffset + packed.length - 8, 8);
  const last = whole.subarray(memberStart);
  if (trailer.getUint32(4, true) !== last.length || trailer.getUint32(0, true) !== crc32(last))
    throw new Error('its checksum does not agree: the copy is damaged or incomplete');
  return whole;
}
