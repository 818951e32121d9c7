/**
 * The buffers of every typed array inside a value, each once, for handing over to another thread without a copy.
 * A view on part of a buffer (a pooled Buffer, a subarray) is left out and so copied: its buffer belongs to others too.
 */
export function transferableBuffers(value: unknown, found = new Set<ArrayBuffer>()): ArrayBuffer[] {
  if (ArrayBuffer.isView(value)) {
    if (value.buffer instanceof ArrayBuffer && value.byteLength === value.buffer.byteLength) found.add(value.buffer);
  } else if (typeof value === 'object' && value !== null) {
    for (const inner of Object.values(value)) {
      if (typeof inner === 'object' && inner !== null) transferableBuffers(inner, found);
    }
  }
  return [...found];
}
