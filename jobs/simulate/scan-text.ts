import { celsiusFromKelvin } from '../../schema/wire/units.ts';

const TIME_FACTORS = { s: 1, ms: 1e3, µs: 1e6, min: 1 / 60, h: 1 / 3600 } as const;
/** Per W; the units per gram divide by the mass. */
const HEAT_FLOW_FACTORS = { W: 1, mW: 1e3, µW: 1e6, nW: 1e9, 'W/g': 1e-3, 'mW/mg': 1e-3 } as const;

export interface TextDialect {
  encoding: 'utf-8' | 'utf-8-bom' | 'latin-1' | 'utf-16le' | 'utf-16be';
  lineEnd: '\n' | '\r\n' | '\r';
  /** `spaces` pads the cells to columns; header words then hold no spaces themselves */
  delimiter: ',' | ';' | '\t' | '|' | 'spaces';
  decimal: '.' | ',';
  timeUnit: keyof typeof TIME_FACTORS;
  temperatureUnit: 'K' | '°C';
  heatFlowUnit: keyof typeof HEAT_FLOW_FACTORS;
  /** Where a unit stands: `quantity [unit]`, `quantity (unit)`, `quantity/unit`, or in a row of its own below the header */
  unitPlace: 'brackets' | 'parentheses' | 'slash' | 'row';
  headers: { time: string; temperature: string; heatFlow: string };
  preamble: readonly string[];
}

export interface ScanColumns {
  timeS: Float64Array;
  temperatureK: Float64Array;
  /** W, whatever sign the instrument has */
  heatFlowW: Float64Array;
  /** Needed for units per gram */
  massKg?: number;
}

/** Significant digits of the written numbers: finer than any noise here, short enough to look like an instrument's file. */
const DIGITS = 7;

/** Delimited text of one scan, as an instrument with this dialect would export it. */
export function writeScanText(columns: ScanColumns, dialect: TextDialect): Uint8Array {
  if (dialect.delimiter === dialect.decimal) {
    throw new RangeError(`delimiter and decimal mark are both ${JSON.stringify(dialect.decimal)}`);
  }
  const { timeUnit, temperatureUnit, heatFlowUnit, headers } = dialect;
  const perGram = heatFlowUnit === 'W/g' || heatFlowUnit === 'mW/mg';
  if (perGram && !columns.massKg) throw new RangeError(`unit ${heatFlowUnit} needs a mass`);
  const flowFactor = HEAT_FLOW_FACTORS[heatFlowUnit] / (perGram ? columns.massKg! : 1);
  const cells = [
    headerCell(headers.time, timeUnit, dialect.unitPlace),
    headerCell(headers.temperature, temperatureUnit, dialect.unitPlace),
    headerCell(headers.heatFlow, heatFlowUnit, dialect.unitPlace),
  ];
  const lines = [...dialect.preamble, joinCells(cells, dialect)];
  if (dialect.unitPlace === 'row') lines.push(joinCells([timeUnit, temperatureUnit, heatFlowUnit], dialect));
  for (let i = 0; i < columns.timeS.length; i++) {
    const kelvin = columns.temperatureK[i];
    const numbers = [
      columns.timeS[i] * TIME_FACTORS[timeUnit],
      temperatureUnit === 'K' ? kelvin : celsiusFromKelvin(kelvin),
      columns.heatFlowW[i] * flowFactor,
    ];
    lines.push(
      joinCells(
        numbers.map((x) => numberCell(x, dialect.decimal)),
        dialect,
      ),
    );
  }
  return encodeText(lines.map((line) => line + dialect.lineEnd).join(''), dialect.encoding);
}

function headerCell(quantity: string, unit: string, place: TextDialect['unitPlace']): string {
  if (place === 'brackets') return `${quantity} [${unit}]`;
  if (place === 'parentheses') return `${quantity} (${unit})`;
  if (place === 'row') return quantity;
  return unit.includes('/') ? `${quantity}/(${unit})` : `${quantity}/${unit}`;
}

function joinCells(cells: readonly string[], { delimiter }: TextDialect): string {
  if (delimiter !== 'spaces') return cells.join(delimiter);
  return cells.map((cell) => cell.replaceAll(' ', '').padStart(16)).join('  ');
}

function numberCell(value: number, decimal: '.' | ','): string {
  const text = String(Number(value.toPrecision(DIGITS)));
  return decimal === '.' ? text : text.replace('.', ',');
}

/** Text to bytes. Latin-1 refuses a character it does not have (RangeError). */
export function encodeText(text: string, encoding: TextDialect['encoding']): Uint8Array {
  if (encoding === 'utf-8') return new TextEncoder().encode(text);
  if (encoding === 'utf-8-bom') return new TextEncoder().encode(`\uFEFF${text}`);
  if (encoding === 'latin-1') {
    return Uint8Array.from(text, (character) => {
      const code = character.charCodeAt(0);
      if (code > 0xff || character.length > 1) throw new RangeError(`Latin-1 has no character ${character}`);
      return code;
    });
  }
  const marked = `\uFEFF${text}`;
  const view = new DataView(new ArrayBuffer(marked.length * 2));
  for (let i = 0; i < marked.length; i++) view.setUint16(i * 2, marked.charCodeAt(i), encoding === 'utf-16le');
  return new Uint8Array(view.buffer);
}
