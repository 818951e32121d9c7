import type { Random } from './random.ts';

export const DELIMITERS = [',', ';', '\t', '|', 'spaces'] as const;
export const DECIMALS = ['.', ','] as const;
export const ENCODINGS = ['utf-8', 'utf-8-bom', 'utf-16le', 'utf-16be', 'latin-1'] as const;
export const NEWLINES = ['\n', '\r\n', '\r'] as const;
export const UNIT_PLACES = ['brackets', 'parentheses', 'slash', 'row'] as const;
export const TIME_UNITS = ['s', 'ms', 'µs', 'min', 'h'] as const;
export const TEMPERATURE_UNITS = ['°C', 'K', '°F'] as const;
export const HEAT_FLOW_UNITS = ['W', 'mW', 'µW', 'nW', 'W/g', 'mW/mg', 'W/kg', 'J/(s g)', 'µV'] as const;

export interface Dialect {
  delimiter: (typeof DELIMITERS)[number];
  decimal: (typeof DECIMALS)[number];
  encoding: (typeof ENCODINGS)[number];
  newline: (typeof NEWLINES)[number];
  /** Lines of talk before the header */
  preambleLines: number;
  unitPlace: (typeof UNIT_PLACES)[number];
  timeUnit: (typeof TIME_UNITS)[number];
  temperatureUnit: (typeof TEMPERATURE_UNITS)[number];
  heatFlowUnit: (typeof HEAT_FLOW_UNITS)[number];
  notation: 'plain' | 'scientific';
  /** Place of time, temperature and heat flow among the columns, e.g. [0, 1, 2] */
  order: readonly [number, number, number];
  /** A leading column that counts the rows */
  indexColumn: boolean;
}

export const PLAIN_DIALECT: Dialect = {
  delimiter: ',',
  decimal: '.',
  encoding: 'utf-8',
  newline: '\n',
  preambleLines: 0,
  unitPlace: 'brackets',
  timeUnit: 's',
  temperatureUnit: '°C',
  heatFlowUnit: 'mW',
  notation: 'plain',
  order: [0, 1, 2],
  indexColumn: false,
};

const ORDERS = [
  [0, 1, 2],
  [1, 0, 2],
  [2, 1, 0],
  [0, 2, 1],
] as const;

/**
 * A run of dialects: each property deals its own values from shuffled decks, so that any nine hold every value of every
 * property and other seeds pair them otherwise. A thermocouple voltage is left out (it needs an instrument with a
 * sensitivity), and where both comma as delimiter and decimal comma come up the delimiter becomes a semicolon.
 */
export function drawDialects(count: number, random: Random): Dialect[] {
  const deal = <T>(items: readonly T[], label: string): T[] => {
    const stream = random.fork(label);
    const out: T[] = [];
    while (out.length < count) {
      const deck = [...items];
      while (deck.length > 0) out.push(deck.splice(stream.integer(deck.length), 1)[0]);
    }
    return out;
  };
  const delimiters = deal(DELIMITERS, 'delimiter');
  const decimals = deal(DECIMALS, 'decimal');
  const encodings = deal(ENCODINGS, 'encoding');
  const newlines = deal(NEWLINES, 'newline');
  const places = deal(UNIT_PLACES, 'place');
  const times = deal(TIME_UNITS, 'time');
  const temperatures = deal(TEMPERATURE_UNITS, 'temperature');
  const flows = deal(
    HEAT_FLOW_UNITS.filter((unit) => unit !== 'µV'),
    'flow',
  );
  const preambles = deal([0, 1, 3, 12, 60], 'preamble');
  const notations = deal(['plain', 'scientific'] as const, 'notation');
  const orders = deal(ORDERS, 'order');
  const indexed = deal([false, false, true], 'index');
  return Array.from({ length: count }, (_, k) => ({
    delimiter: delimiters[k] === ',' && decimals[k] === ',' ? ';' : delimiters[k],
    decimal: decimals[k],
    encoding: encodings[k],
    newline: newlines[k],
    preambleLines: preambles[k],
    unitPlace: places[k],
    timeUnit: times[k],
    temperatureUnit: temperatures[k],
    heatFlowUnit: flows[k],
    notation: notations[k],
    order: orders[k],
    indexColumn: indexed[k],
  }));
}
