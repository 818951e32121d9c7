import { randomBytes } from 'node:crypto';
import { get as request } from 'node:http';
import type { Socket } from 'node:net';

/** Memory of one isolate, MB: objects in use, all of the heap, and buffers outside of it. */
export interface HeapUsage {
  usedMb: number;
  heapMb: number;
  buffersMb: number;
}

interface InspectorAnswer {
  id?: number;
  result?: { usedSize: number; totalSize: number; backingStorageSize?: number };
  error?: { message: string };
}

const MB = 1e6;

/** One frame (of text unless `kind` says otherwise) from a client, masked as RFC 6455, 5.3 asks; at most 64 kB. */
function frameOf(body: Buffer, kind = 0x1): Buffer {
  const mask = randomBytes(4);
  const head =
    body.length < 126 ? Buffer.from([0x80 | kind, 0x80 | body.length]) : Buffer.from([0x80 | kind, 0xfe, 0, 0]);
  if (body.length >= 126) head.writeUInt16BE(body.length, 2);
  return Buffer.concat([head, mask, body.map((byte, i) => byte ^ mask[i % 4])]);
}

/** Calls `hear` with each whole text message (RFC 6455, 5.2). Frames that a server sends are not masked. */
function listenToFrames(socket: Socket, hear: (text: string) => void): void {
  let kept = Buffer.alloc(0);
  let message = '';
  socket.on('data', (chunk) => {
    kept = Buffer.concat([kept, chunk]);
    for (;;) {
      if (kept.length < 2) return;
      const short = kept[1] & 0x7f;
      const start = short === 126 ? 4 : short === 127 ? 10 : 2;
      if (kept.length < start) return;
      const length = short === 126 ? kept.readUInt16BE(2) : short === 127 ? Number(kept.readBigUInt64BE(2)) : short;
      if (kept.length < start + length) return;
      const [last, kind] = [kept[0] & 0x80, kept[0] & 0x0f];
      // A ping is answered, else the other side hangs up.
      if (kind === 9) socket.write(frameOf(kept.subarray(start, start + length), 0xa));
      if (kind < 3) message += kept.subarray(start, start + length).toString();
      if (kind < 3 && last) {
        hear(message);
        message = '';
      }
      kept = kept.subarray(start + length);
    }
  });
}

/** Asks the inspector of a runtime for the memory of its one isolate: the emulated bucket and queue are outside of it. */
export async function openHeapGauge(inspector: URL): Promise<{ read(): Promise<HeapUsage>; close(): void }> {
  const socket = await new Promise<Socket>((resolve, reject) => {
    const headers = {
      connection: 'Upgrade',
      upgrade: 'websocket',
      'sec-websocket-version': '13',
      'sec-websocket-key': randomBytes(16).toString('base64'),
    };
    const asked = request({ host: inspector.hostname, port: inspector.port, path: inspector.pathname, headers });
    asked.on('upgrade', (_answer, opened) => resolve(opened as Socket));
    asked.on('response', (answer) => reject(new Error(`the inspector answered ${answer.statusCode}`)));
    asked.on('error', reject);
  });
  const waiting = new Map<number, (answer: InspectorAnswer) => void>();
  let broken: Error | undefined;
  socket.on('error', (error) => {
    broken = error;
    for (const end of waiting.values()) end({ error });
    waiting.clear();
  });
  listenToFrames(socket, (text) => {
    const answer = JSON.parse(text) as InspectorAnswer;
    if (answer.id === undefined) return;
    waiting.get(answer.id)?.(answer);
    waiting.delete(answer.id);
  });
  let lastId = 0;
  return {
    async read() {
      if (broken) throw broken;
      const id = ++lastId;
      const answered = new Promise<InspectorAnswer>((resolve) => waiting.set(id, resolve));
      socket.write(frameOf(Buffer.from(JSON.stringify({ id, method: 'Runtime.getHeapUsage' }))));
      const { result, error } = await answered;
      if (!result) throw new Error(`the inspector refused: ${error?.message}`);
      return {
        usedMb: result.usedSize / MB,
        heapMb: result.totalSize / MB,
        buffersMb: (result.backingStorageSize ?? 0) / MB,
      };
    },
    close: () => socket.destroy(),
  };
}
