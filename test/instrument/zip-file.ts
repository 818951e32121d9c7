import { deflateRawSync, gzipSync } from 'node:zlib';

export interface ZipPart {
  name: string | Uint8Array;
  data?: Uint8Array;
  /** Deflated bytes, in place of `data` */
  packed?: Uint8Array;
  method?: number;
  flags?: number;
  crc?: number;
  statedBytes?: number;
}

/** CRC-32 of bytes by zlib, from the trailer of a gzip member (RFC 1952, section 2.3.1). */
export function zlibCrc32(data: Uint8Array): number {
  const packed = gzipSync(data);
  return packed.readUInt32LE(packed.length - 8);
}

/** A zip file (APPNOTE 6.3) that may lie about itself: what ordinary packers would not write. */
export function makeZip(parts: ZipPart[]): Uint8Array {
  const blocks: Buffer[] = [];
  const directory: Buffer[] = [];
  let offset = 0;
  for (const part of parts) {
    const name = Buffer.from(part.name as Uint8Array);
    const data = part.data ?? new Uint8Array(0);
    const method = part.method ?? 8;
    const packed = part.packed ?? (method === 8 ? deflateRawSync(data) : data);
    const fields = Buffer.alloc(26);
    fields.writeUInt16LE(20, 0);
    fields.writeUInt16LE(part.flags ?? 0, 2);
    fields.writeUInt16LE(method, 4);
    fields.writeUInt32LE(part.crc ?? (part.packed === undefined ? zlibCrc32(data) : 0), 10);
    fields.writeUInt32LE(packed.length, 14);
    fields.writeUInt32LE(part.statedBytes ?? data.length, 18);
    fields.writeUInt16LE(name.length, 22);
    const entry = Buffer.alloc(16);
    entry.writeUInt32LE(offset, 12);
    directory.push(Buffer.from([0x50, 0x4b, 1, 2, 20, 0]), fields, entry.subarray(2), name);
    const local = [Buffer.from([0x50, 0x4b, 3, 4]), fields, name, Buffer.from(packed)];
    blocks.push(...local);
    offset += local.reduce((sum, b) => sum + b.length, 0);
  }
  const head = Buffer.concat(directory);
  const end = Buffer.alloc(22);
  end.writeUInt32LE(0x06054b50, 0);
  end.writeUInt16LE(parts.length, 8);
  end.writeUInt16LE(parts.length, 10);
  end.writeUInt32LE(head.length, 12);
  end.writeUInt32LE(offset, 16);
  return new Uint8Array(Buffer.concat([...blocks, head, end]));
}
