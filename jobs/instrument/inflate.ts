/** Inflating with limits that hold WHILE bytes come out, so that a small archive cannot fill the memory. */
import { Inflate } from 'fflate';

/** Compressed bytes fed at a time: deflate expands at most 1032-fold (RFC 1951), so one step yields at most 8.5 MB. */
export const STEP_BYTES = 8192;
/** Below so many unpacked bytes the ratio is not asked: a short file of equal lines packs very well. */
const RATIO_FLOOR_BYTES = 1_000_000;

export interface UnpackLimits {
  /** Sum over all members of one archive */
  unpackedBytes: number;
  /** Unpacked over packed bytes */
  ratio: number;
}

/** Limits for an ordinary server. */
export const ARCHIVE_LIMITS: UnpackLimits = { unpackedBytes: 1_000_000_000, ratio: 200 };

/** An archive that is not unpacked at all: what was found, and what to do. */
export class ArchiveRefused extends Error {
  constructor(
    reason: string,
    readonly action: string,
  ) {
    super(reason);
    this.name = 'ArchiveRefused';
  }
}

/** Counts unpacked bytes of one archive against its limits. */
export interface Budget {
  /** Throws ArchiveRefused when `produced` bytes from `consumed` packed ones, on top of what is spent, are too many. */
  check(produced: number, consumed: number): void;
  /** Counts a finished member. */
  spend(produced: number): void;
}

export function createBudget(path: string, limits: UnpackLimits): Budget {
  let spent = 0;
  return {
    check(produced, consumed) {
      if (spent + produced > limits.unpackedBytes)
        throw new ArchiveRefused(
          `${path} unpacks to more than ${limits.unpackedBytes} bytes`,
          'Split the archive into smaller ones.',
        );
      if (produced > RATIO_FLOOR_BYTES && produced > limits.ratio * consumed)
        throw new ArchiveRefused(
          `${path} unpacks more than ${limits.ratio}-fold (${produced} bytes from ${consumed})`,
          'Instrument text packs 3- to 20-fold: check what the archive holds, or send the files unpacked.',
        );
    },
    spend(produced) {
      spent += produced;
    },
  };
}

/**
 * Inflates raw deflate data. `most` bounds the output further (a size stated beforehand); more output ends it with that many and a byte.
 * Throws an Error with a plain message when the data are damaged or cut, ArchiveRefused when a limit is passed.
 */
export function inflateLimited(packed: Uint8Array, budget: Budget, most: number): Uint8Array {
  const parts: Uint8Array[] = [];
  let produced = 0;
  const stream = new Inflate((chunk) => {
    if (chunk.length === 0) return;
    produced += chunk.length;
    parts.push(chunk);
  });
  for (let at = 0; at < packed.length || at === 0; at += STEP_BYTES) {
    const end = Math.min(at + STEP_BYTES, packed.length);
    stream.push(packed.subarray(at, end), end === packed.length);
    budget.check(produced, end);
    if (produced > most) break;
  }
  return joined(parts, produced);
}

export function joined(parts: readonly Uint8Array[], length: number): Uint8Array {
  if (parts.length === 1) return parts[0];
  const whole = new Uint8Array(length);
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}

const CRC_TABLE = Uint32Array.from({ length: 256 }, (_, byte) => {
  let rest = byte;
  for (let bit = 0; bit < 8; bit++) rest = rest & 1 ? (rest >>> 1) ^ 0xedb88320 : rest >>> 1;
  return rest;
});

/** CRC-32 as zip and gzip keep it (ISO 3309; RFC 1952, section 8). */
export function crc32(bytes: Uint8Array): number {
  let rest = 0xffffffff;
  for (let i = 0; i < bytes.length; i++) rest = CRC_TABLE[(rest ^ bytes[i]) & 0xff] ^ (rest >>> 8);
  return (rest ^ 0xffffffff) >>> 0;
}
