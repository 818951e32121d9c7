/**
 * Units as instruments and sheets write them, and their way to SI: valueSI = (value + offset) · scale / per.
 * A spelling is first reduced to a canonical form (`mW mg⁻¹` → `mW/mg`, `J/(s g)` → `J/g s`); one that is not in the table is not known, and nothing is guessed.
 * Factors: SI brochure (9th edition, BIPM 2019), section 2 and table 8; degree Fahrenheit T/K = (t/°F + 459.67) · 5/9 (NIST SP 811, B.8).
 */
import { ZERO_CELSIUS_K } from '../../schema/wire/units.ts';

export type Quantity =
  | 'time'
  | 'temperature'
  | 'temperature difference'
  | 'heat flow'
  | 'rate'
  | 'mass'
  | 'enthalpy'
  | 'heat capacity'
  | 'molar mass'
  | 'velocity'
  | 'sensitivity'
  | 'log10 viscosity'
  | 'number';

export interface Unit {
  /** Canonical spelling, with µ. */
  symbol: string;
  offset: number;
  scale: number;
  /** Where a factor below 1 is one over a whole number, that number: 1.25 mg is 1.25/1e6 kg, rounded once. */
  per: number;
  /** SI unit of the converted value: s, K, W, W/kg, V, K/s, kg, … */
  si: string;
}

/** Words that mean one unit symbol each; compared as written, then in lower case for words of three letters and more. */
// biome-ignore format: one unit a line reads better
const SYMBOLS: Record<string, string> = {
  s: 's', S: 's', sec: 's', secs: 's', second: 's', seconds: 's',
  ms: 'ms', msec: 'ms', millisecond: 'ms', milliseconds: 'ms',
  us: 'us', usec: 'us', microsecond: 'us', microseconds: 'us',
  min: 'min', mins: 'min', minute: 'min', minutes: 'min',
  h: 'h', H: 'h', hr: 'h', hrs: 'h', hour: 'h', hours: 'h',
  K: 'K', k: 'K', kelvin: 'K', degk: 'K', '°K': 'K', mK: 'mK',
  C: '°C', c: '°C', '°C': '°C', '°c': '°C', oC: '°C', degc: '°C', celsius: '°C',
  F: '°F', f: '°F', '°F': '°F', '°f': '°F', oF: '°F', degf: '°F', fahrenheit: '°F',
  W: 'W', w: 'W', watt: 'W', watts: 'W', mW: 'mW', mw: 'mW', uW: 'uW', uw: 'uW', nW: 'nW', nw: 'nW',
  J: 'J', mJ: 'mJ', uJ: 'uJ', kJ: 'kJ',
  kg: 'kg', g: 'g', mg: 'mg', ug: 'ug', ng: 'ng', pg: 'pg',
  V: 'V', mV: 'mV', uV: 'uV', nV: 'nV', uv: 'uV',
  Pa: 'Pa', dPa: 'dPa', P: 'P', poise: 'P',
  mol: 'mol', m: 'm', cm: 'cm', mm: 'mm', um: 'um', nm: 'nm', '%': '%', '1': '1', '-': '1',
};

const SECONDS: Record<string, number> = { s: 1, ms: 1e-3, us: 1e-6, min: 60, h: 3600 };
const KILOGRAMS: Record<string, number> = { kg: 1, g: 1e-3, mg: 1e-6, ug: 1e-9, ng: 1e-12, pg: 1e-15 };
const WATTS: Record<string, number> = { W: 1, mW: 1e-3, uW: 1e-6, nW: 1e-9 };
const JOULES: Record<string, number> = { J: 1, mJ: 1e-3, uJ: 1e-6 };
const VOLTS: Record<string, number> = { V: 1, mV: 1e-3, uV: 1e-6, nV: 1e-9 };

type Entry = readonly [scale: number, si: string, offset?: number];

function withSi(factors: Record<string, number>, si: string): Record<string, Entry> {
  return Object.fromEntries(Object.entries(factors).map(([symbol, scale]) => [symbol, [scale, si] as const]));
}

/** Every numerator over every denominator, as `a/b`. Powers of ten are made exact: 1e-3/1e-6 is not 1000 in binary. */
function quotients(over: Record<string, number>, under: Record<string, number>, si: string): Record<string, Entry> {
  const out: Record<string, Entry> = {};
  for (const [a, x] of Object.entries(over))
    for (const [b, y] of Object.entries(under)) out[canonical(`${a}/${b}`)] = [exactPower(x / y), si];
  return out;
}

function exactPower(value: number): number {
  const exponent = Math.round(Math.log10(value));
  return Math.abs(Math.log10(value) - exponent) < 1e-12 ? Number(`1e${exponent}`) : value;
}

const KELVIN_STEP = { K: 1, '°C': 1, '°F': 5 / 9 };
const JOULES_PER_TIME = Object.fromEntries(Object.entries(JOULES).map(([j, scale]) => [`${j}/s`, scale]));

const UNITS: Record<Quantity, Record<string, Entry>> = {
  time: withSi(SECONDS, 's'),
  temperature: { K: [1, 'K'], '°C': [1, 'K', ZERO_CELSIUS_K], '°F': [5 / 9, 'K', 459.67] },
  'temperature difference': withSi({ ...KELVIN_STEP, mK: 1e-3 }, 'K'),
  'heat flow': {
    ...withSi(WATTS, 'W'),
    ...withSi(JOULES_PER_TIME, 'W'),
    ...withSi(VOLTS, 'V'),
    ...quotients({ ...WATTS, ...JOULES_PER_TIME }, KILOGRAMS, 'W/kg'),
  },
  rate: quotients(KELVIN_STEP, SECONDS, 'K/s'),
  mass: withSi(KILOGRAMS, 'kg'),
  enthalpy: quotients({ kJ: 1e3, ...JOULES }, KILOGRAMS, 'J/kg'),
  'heat capacity': { 'J/K g': [1e3, 'J/(kg K)'], 'J/K kg': [1, 'J/(kg K)'], 'kJ/K kg': [1e3, 'J/(kg K)'] },
  'molar mass': quotients({ kg: 1, g: 1e-3 }, { mol: 1 }, 'kg/mol'),
  velocity: quotients({ m: 1, cm: 1e-2, mm: 1e-3, um: 1e-6, nm: 1e-9 }, SECONDS, 'm/s'),
  sensitivity: quotients(VOLTS, WATTS, 'V/W'),
  // The logarithm of a number of poises (1 P = 0.1 Pa s) is one larger.
  'log10 viscosity': { 'Pa s': [1, 'Pa s'], 'dPa s': [1, 'Pa s', -1], P: [1, 'Pa s', -1] },
  number: { '1': [1, '1'], '%': [1e-2, '1'] },
};

/** What a refusal offers, per quantity. */
const OFFERED: Record<Quantity, string> = {
  time: 's, ms, µs, min, h',
  temperature: 'K, °C, °F',
  'temperature difference': 'K, °C, °F',
  'heat flow': 'W, mW, µW, nW, W/g, mW/mg, mW/g, W/kg, J/(s g), µV',
  rate: 'K/min, K/s',
  mass: 'mg, µg, ng, g, kg',
  enthalpy: 'J/g, J/kg, kJ/kg',
  'heat capacity': 'J/(g K), J/(kg K)',
  'molar mass': 'g/mol, kg/mol',
  velocity: 'm/s, mm/s, µm/s, nm/s',
  sensitivity: 'µV/mW, V/W',
  'log10 viscosity': 'Pa s, P',
  number: '1, %',
};

export function offeredUnits(quantity: Quantity): string {
  return OFFERED[quantity];
}

/** The unit that `text` (brackets or not) means for a quantity, or undefined when it is not in the table. */
export function unitOf(quantity: Quantity, text: string): Unit | undefined {
  const symbol = canonical(text);
  const table = UNITS[quantity];
  if (symbol === '' || !Object.hasOwn(table, symbol)) return undefined;
  const [scale, si, offset = 0] = table[symbol];
  const inverse = Math.round(1 / scale);
  const whole = scale < 1 && Math.abs(inverse * scale - 1) < 1e-12;
  return {
    symbol: symbol.replace(/^u|(?<=[/ ])u/g, 'µ'),
    offset,
    scale: whole ? 1 : scale,
    per: whole ? inverse : 1,
    si,
  };
}

export function toSi(value: number, { offset, scale, per }: Unit): number {
  return ((value + offset) * scale) / per;
}

/** `J/(s·g)`, `J g⁻¹ s⁻¹`, `J per g s`, `J/g/s` → `J/g s`: numerators, then denominators, each in alphabetical order; empty when a word is unknown. */
function canonical(text: string): string {
  const flat = text
    .replace(/[˚º]/g, '°')
    .normalize('NFKC')
    .replace(/[\u00b5\u03bc]/g, 'u')
    .replace(/[−–]/g, '-')
    .replace(/[·⋅∙×*.]/g, ' ')
    .replace(/\bdeg(?:ree)?s?\s*(?=[CFK]\b)/gi, '°')
    .replace(/\bdeg(?:ree)?s?\s+(?=celsius|fahrenheit)/gi, '')
    .replace(/°\s+/g, '°')
    .replace(/\bper\b/g, '/')
    .replace(/\^|[{}]/g, '')
    .trim();
  const unwrapped = /^\[[^[\]]*\]$|^\([^()]*\)$/.test(flat) ? flat.slice(1, -1) : flat;
  const over: string[] = [];
  const under: string[] = [];
  let below = false;
  let depth = 0;
  for (const [part] of unwrapped.matchAll(/[/()]|[^\s/()]+/g)) {
    if (part === '/') below = true;
    else if (part === '(') depth++;
    else if (part === ')') depth--;
    else {
      const [, word, power] = /^(.*?)(-1)?$/.exec(part) as unknown as [string, string, string | undefined];
      const symbol = symbolOf(word === '' ? part : word);
      if (symbol === undefined) return '';
      (below !== (power !== undefined && word !== '') ? under : over).push(symbol);
    }
  }
  if (depth !== 0) return '';
  return under.length === 0 ? over.join(' ') : `${over.sort().join(' ')}/${under.sort().join(' ')}`;
}

function symbolOf(word: string): string | undefined {
  if (Object.hasOwn(SYMBOLS, word)) return SYMBOLS[word];
  const lower = word.toLowerCase();
  return word.length >= 3 && Object.hasOwn(SYMBOLS, lower) ? SYMBOLS[lower] : undefined;
}
