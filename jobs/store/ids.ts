import { createHash } from 'node:crypto';

const PREFIXES = {
  campaign: 'c',
  file: 'f',
  scan: 's',
  sample: 'm',
  instrument: 'i',
  job: 'j',
  blob: 'b',
  correction: 'k',
  token: 't',
  database: 'd',
} as const;

/** A random id, 96 bits, prefixed by what it names. */
export function createId(kind: keyof typeof PREFIXES): string {
  const bytes = crypto.getRandomValues(new Uint8Array(12));
  return `${PREFIXES[kind]}_${Buffer.from(bytes).toString('hex')}`;
}

/** JSON with object keys sorted at every depth, so that equal values give equal text; undefined members are left out. */
export function canonicalJson(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map((v) => canonicalJson(v ?? null)).join(',')}]`;
  if (value === null || typeof value !== 'object') return JSON.stringify(value) ?? 'null';
  const entries = Object.entries(value).filter(([, v]) => v !== undefined);
  entries.sort(([a], [b]) => (a < b ? -1 : 1));
  return `{${entries.map(([k, v]) => `${JSON.stringify(k)}:${canonicalJson(v)}`).join(',')}}`;
}

/** SHA-256 of the canonical JSON of a value, hex. */
export const hashOf = (value: unknown): string => createHash('sha256').update(canonicalJson(value)).digest('hex');

export const sha256Hex = (bytes: Uint8Array): string => createHash('sha256').update(bytes).digest('hex');
