/**
 * POSIX tar (IEEE Std 1003.1, ustar interchange format), as much as a backup needs: regular files with short ASCII names,
 * written and read as streams.
 */
const BLOCK = 512;
/** Eleven octal digits. */
const LARGEST = 0o77777777777;

export interface TarEntry {
  name: string;
  size: number;
  body: AsyncIterable<Uint8Array>;
}

const ascii = (block: Uint8Array, at: number, length: number, text: string): void => {
  block.set(new TextEncoder().encode(text).subarray(0, length), at);
};

function header(name: string, size: number): Uint8Array {
  // Names over 100 characters are split at a slash into prefix and name.
  const cut = name.length <= 100 ? -1 : name.lastIndexOf('/', 155);
  const tail = name.slice(cut + 1);
  if (tail.length > 100 || !/^[\x21-\x7e]+$/.test(name)) throw new RangeError(`no place for the name ${name} in a tar`);
  if (size > LARGEST) throw new RangeError(`${name} has ${size} bytes; a tar takes ${LARGEST}`);
  const block = new Uint8Array(BLOCK);
  ascii(block, 0, 100, tail);
  ascii(block, 100, 8, '0000644\0');
  ascii(block, 108, 8, '0000000\0');
  ascii(block, 116, 8, '0000000\0');
  ascii(block, 124, 12, `${size.toString(8).padStart(11, '0')}\0`);
  ascii(block, 136, 12, '00000000000\0');
  ascii(block, 148, 8, '        ');
  ascii(block, 156, 1, '0');
  ascii(block, 257, 8, 'ustar\u000000');
  if (cut > 0) ascii(block, 345, 155, name.slice(0, cut));
  const sum = block.reduce((a, b) => a + b, 0);
  ascii(block, 148, 8, `${sum.toString(8).padStart(6, '0')}\0 `);
  return block;
}

/** The bytes of an archive. Throws RangeError where a body has another size than its entry says. */
export async function* writeTar(entries: AsyncIterable<TarEntry>): AsyncGenerator<Uint8Array> {
  for await (const { name, size, body } of entries) {
    yield header(name, size);
    let written = 0;
    for await (const chunk of body) {
      written += chunk.byteLength;
      yield chunk;
    }
    if (written !== size) throw new RangeError(`${name} changed while it was copied: ${written} bytes, not ${size}`);
    if (size % BLOCK) yield new Uint8Array(BLOCK - (size % BLOCK));
  }
  yield new Uint8Array(2 * BLOCK);
}

const field = (block: Uint8Array, at: number, length: number): string => {
  const text = new TextDecoder().decode(block.subarray(at, at + length));
  const end = text.indexOf('\0');
  return end < 0 ? text : text.slice(0, end);
};

/** Hands each file to `take` in turn, which must read its body to the end. Throws RangeError where the bytes are no such archive. */
export async function readTar(
  source: AsyncIterable<Uint8Array>,
  take: (entry: TarEntry) => Promise<void>,
): Promise<void> {
  const iterator = source[Symbol.asyncIterator]();
  let rest = new Uint8Array(0);
  const more = async (): Promise<boolean> => {
    const { done, value } = await iterator.next();
    if (done) return false;
    rest = rest.length === 0 ? new Uint8Array(value) : Buffer.concat([rest, value]);
    return true;
  };
  async function* bytes(length: number): AsyncGenerator<Uint8Array> {
    for (let left = length; left > 0; ) {
      if (rest.length === 0 && !(await more())) throw new RangeError('the archive ends in the middle of a file');
      const part = rest.subarray(0, Math.min(left, rest.length));
      rest = rest.subarray(part.length);
      left -= part.length;
      yield part;
    }
  }
  const block = async (): Promise<Uint8Array> => {
    const whole = new Uint8Array(BLOCK);
    let at = 0;
    for await (const part of bytes(BLOCK)) {
      whole.set(part, at);
      at += part.length;
    }
    return whole;
  };
  for (;;) {
    const head = await block();
    if (head.every((b) => b === 0)) return;
    const sum = head.reduce((a, b, i) => a + (i >= 148 && i < 156 ? 0x20 : b), 0);
    if (field(head, 257, 5) !== 'ustar' || Number.parseInt(field(head, 148, 8), 8) !== sum)
      throw new RangeError('this is no archive of a backup, or it is damaged');
    const prefix = field(head, 345, 155);
    const size = Number.parseInt(field(head, 124, 12), 8);
    await take({ name: `${prefix && `${prefix}/`}${field(head, 0, 100)}`, size, body: bytes(size) });
    if (size % BLOCK) for await (const _ of bytes(BLOCK - (size % BLOCK)));
  }
}
