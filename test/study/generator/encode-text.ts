import type { Dialect } from './dialects.ts';

/** Text → bytes in one of the encodings, with a byte order mark where the encoding is one that has it. */
export function encodeText(text: string, encoding: Dialect['encoding']): Uint8Array {
  switch (encoding) {
    case 'utf-8':
      return new TextEncoder().encode(text);
    case 'utf-8-bom':
      return new TextEncoder().encode(`\ufeff${text}`);
    case 'latin-1':
      return Uint8Array.from(text, (character) => {
        const code = character.charCodeAt(0);
        if (code > 0xff) throw new RangeError(`Latin-1 has no character ${JSON.stringify(character)}`);
        return code;
      });
    case 'utf-16le':
    case 'utf-16be': {
      const out = new Uint8Array(2 * (text.length + 1));
      const view = new DataView(out.buffer);
      const little = encoding === 'utf-16le';
      view.setUint16(0, 0xfeff, little);
      for (let k = 0; k < text.length; k++) view.setUint16(2 * (k + 1), text.charCodeAt(k), little);
      return out;
    }
  }
}
