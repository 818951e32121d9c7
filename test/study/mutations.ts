import { encode, plainScan, tableText } from '../instrument/scan-text.ts';
import type { Random } from './generator/index.ts';

/** A sound file to start from: bytes, and the path that says how it is read. */
export interface SoundFile {
  path: string;
  bytes: Uint8Array;
}

/** Header and one row of each sheet; `#` becomes the row's number. */
const SHEETS: Record<string, [string, string]> = {
  'scans.csv': ['file,sample,instrument,rate [K/min],mass [mg],exotherm', 'a-#.txt,glass,furnace,10,5.#,up'],
  'instruments.csv': ['instrument;kind;lag [s];offset [K]', 'furnace-#;furnace;2,#;0,3'],
  'samples.csv': ['sample,melting temperature [°C],enthalpy of crystallization [J/g],note', 'glass-#,512.#,45,"a, b"'],
};

const ENCODINGS = ['utf8', 'utf8-mark', 'utf16le', 'utf16le-mark', 'utf16be', 'utf16be-mark', 'latin1'] as const;

/** Text of a scan of 25 to 2000 rows in a drawn dialect and encoding. */
export function drawScan(random: Random): SoundFile {
  const rows = Math.round(random.betweenLog(25, 2000));
  const encoding = random.pick(ENCODINGS);
  if (random.uniform() < 0.3) return { path: 'sample/furnace/a.csv', bytes: encode(plainScan(rows), encoding) };
  const delimiter = random.pick(['\t', ';', '|', '   '] as const);
  const dialect = {
    delimiter,
    decimal: random.pick(['.', ','] as const),
    lineEnd: random.pick(['\n', '\r\n', '\r'] as const),
  };
  const head = Array.from({ length: random.integer(30) }, (_, k) => `Line ${k}: ${random.uniform()} exo up`);
  const body = Array.from({ length: rows }, (_, i) => [
    (i * 0.2).toFixed(2),
    (300 + 0.05 * i + 0.001 * random.normal()).toFixed(4),
    random.normal().toExponential(5),
  ]);
  const text = tableText(dialect, head, ['time [s]', 'temperature [K]', 'heat flow [mW]'], body);
  return { path: 'sample/chip/b.txt', bytes: encode(text, encoding) };
}

export function drawSheet(random: Random): SoundFile {
  const [path, [header, row]] = random.pick(Object.entries(SHEETS));
  const rows = Array.from({ length: 1 + random.integer(60) }, (_, k) => row.replaceAll('#', String(k)));
  return { path, bytes: encode(`${[header, ...rows].join('\n')}\n`, random.pick(ENCODINGS)) };
}

type Mutation = (bytes: Uint8Array, random: Random) => Uint8Array;

function splice(bytes: Uint8Array, at: number, cut: number, put: Uint8Array): Uint8Array {
  const out = new Uint8Array(at + put.length + Math.max(0, bytes.length - at - cut));
  out.set(bytes.subarray(0, at));
  out.set(put, at);
  out.set(bytes.subarray(at + cut), at + put.length);
  return out;
}

const text = (value: string) => new TextEncoder().encode(value);

/** A place just behind a delimiter or a line end, where a cell starts. */
function cellStart(bytes: Uint8Array, random: Random): number {
  const from = random.integer(bytes.length + 1);
  for (let i = from; i < bytes.length; i++) if ([9, 10, 13, 44, 59, 124].includes(bytes[i])) return i + 1;
  return from;
}

const HUGE = ['1e308', '-1e308', '1e309', '1e999', '9'.repeat(5000), `0.${'0'.repeat(4000)}1`, '1e-400', 'inf', 'NaN'];

/** Each changes whole bytes, whatever they stand for. */
export const MUTATIONS: Record<string, Mutation> = {
  'byte flips': (bytes, random) => {
    const out = Uint8Array.from(bytes);
    const flips = Math.round(random.betweenLog(1, 200));
    for (let k = 0; k < flips && out.length > 0; k++) out[random.integer(out.length)] ^= 1 << random.integer(8);
    return out;
  },
  cuts: (bytes, random) => {
    const at = random.integer(bytes.length + 1);
    return random.uniform() < 0.5 ? bytes.slice(0, at) : splice(bytes, at, random.integer(bytes.length + 1), text(''));
  },
  duplications: (bytes, random) => {
    const from = random.integer(bytes.length + 1);
    const part = bytes.subarray(from, from + Math.round(random.betweenLog(1, 20_000)));
    const times = Math.round(random.betweenLog(1, 60));
    const put = new Uint8Array(part.length * times);
    for (let k = 0; k < times; k++) put.set(part, k * part.length);
    return splice(bytes, from, 0, put);
  },
  'encoding swaps': (bytes, random) => {
    const as = random.pick(['utf8', 'latin1', 'utf16le'] as const);
    const swapped = new Uint8Array(Buffer.from(Buffer.from(bytes).toString(as), random.pick(['utf8', 'utf16le'])));
    const start = random.integer(swapped.length + 1);
    // Half of them change their encoding on the way.
    return random.uniform() < 0.5 ? swapped : splice(bytes, start, bytes.length, swapped.subarray(start));
  },
  'long lines': (bytes, random) => {
    const length = Math.round(random.betweenLog(1000, 3_000_000));
    const put = new Uint8Array(length).fill(random.pick([0x31, 0x20, 0x2c, 0x3b, 0x22, 0x41, 0x30]));
    return splice(bytes, cellStart(bytes, random), 0, put);
  },
  'huge numbers': (bytes, random) => {
    let out = bytes;
    const times = 1 + random.integer(4);
    for (let k = 0; k < times; k++)
      out = splice(out, cellStart(out, random), random.integer(8), text(random.pick(HUGE)));
    return out;
  },
  'stray text': (bytes, random) => {
    const strays = ['"', '\0', '\r', '\n\n\n', ',,,', ';', '\ufeff', '=1+1', '\u2028', 'e', '-', '💧', '[K]', '(mW)'];
    let out = bytes;
    const times = Math.round(random.betweenLog(1, 40));
    for (let k = 0; k < times; k++)
      out = splice(out, random.integer(out.length + 1), random.integer(3), text(random.pick(strays)));
    return out;
  },
  'lines lost and moved': (bytes, random) => {
    const lines = Buffer.from(bytes).toString('latin1').split('\n');
    const times = Math.round(random.betweenLog(1, 50));
    for (let k = 0; k < times && lines.length > 1; k++) {
      const [line] = lines.splice(random.integer(lines.length), 1);
      if (random.uniform() < 0.6) lines.splice(random.integer(lines.length + 1), 0, line);
    }
    return new Uint8Array(Buffer.from(lines.join('\n'), 'latin1'));
  },
};
