import type { Dialect } from './dialects.ts';
import { encodeText } from './encode-text.ts';
import type { RecordedScan } from './recording.ts';

export interface WriteSettings {
  dialect: Dialect;
  /** Which way the file draws an exotherm; `headerWords` says so in the header cell. */
  exotherm: 'up' | 'down';
  headerWords?: boolean;
  /** For units per mass */
  massKg: number;
  /** For µV, V/W */
  sensitivityVPerW?: number;
  /** The clock's reading at the first row, s */
  clockStartS?: number;
  /** Significant digits */
  digits?: number;
  flaws?: {
    /** Rows written twice with the same time */
    repeatedTimes?: number;
    /** Cells replaced by words such as `overrange` */
    wordCells?: number;
    /** The file ends after this share of its rows, in the middle of a row. */
    cutAt?: number;
  };
}

const TIME: Record<Dialect['timeUnit'], number> = { s: 1, ms: 1e3, µs: 1e6, min: 1 / 60, h: 1 / 3600 };

function temperatureIn(unit: Dialect['temperatureUnit'], kelvin: number): number {
  if (unit === 'K') return kelvin;
  const celsius = kelvin - 273.15;
  return unit === '°C' ? celsius : celsius * 1.8 + 32;
}

function heatFlowFactor(unit: Dialect['heatFlowUnit'], massKg: number, sensitivityVPerW: number | undefined): number {
  switch (unit) {
    case 'W':
      return 1;
    case 'mW':
      return 1e3;
    case 'µW':
      return 1e6;
    case 'nW':
      return 1e9;
    case 'W/kg':
      return 1 / massKg;
    case 'W/g':
    case 'mW/mg':
    case 'J/(s g)':
      return 1e-3 / massKg;
    case 'µV':
      if (sensitivityVPerW === undefined) throw new RangeError('a file in µV needs the sensitivity of its instrument');
      return 1e6 * sensitivityVPerW;
  }
}

const PREAMBLE = [
  'SYNTHETIC DATA: made by a simulation, no measurement',
  'Gas: none',
  'Pan: drawn',
  'Remark: baseline, noise and drift are invented',
  'Number of runs: 1',
];

const UNIT_FORMS: Record<Dialect['unitPlace'], (name: string, unit: string) => string> = {
  brackets: (name, unit) => `${name} [${unit}]`,
  parentheses: (name, unit) => `${name} (${unit})`,
  slash: (name, unit) => `${name} / ${unit}`,
  row: (name) => name,
};

/** A recorded scan as the bytes of a text file. Says in its own preamble, where it has one, that it is synthetic. */
export function writeScan(scan: RecordedScan, settings: WriteSettings): Uint8Array {
  const { dialect, flaws } = settings;
  const digits = settings.digits ?? 9;
  const sign = settings.exotherm === 'up' ? 1 : -1;
  const factor = sign * heatFlowFactor(dialect.heatFlowUnit, settings.massKg, settings.sensitivityVPerW);
  const flowName = settings.headerWords ? `Heat flow exo ${settings.exotherm}` : 'Heat flow';
  const names = ['Time', 'Temperature', flowName];
  const units = [dialect.timeUnit, dialect.temperatureUnit, dialect.heatFlowUnit];
  const write = (value: number): string => {
    const text = dialect.notation === 'plain' ? plainNumber(value, digits) : value.toExponential(digits - 1);
    return dialect.decimal === ',' ? text.replace('.', ',') : text;
  };
  const join = (cells: string[]): string =>
    dialect.delimiter === 'spaces'
      ? cells.map((cell) => cell.padStart(Math.max(20, cell.length + 3))).join('')
      : cells.join(dialect.delimiter);
  const arrange = (cells: string[], first: string): string =>
    join([...(dialect.indexColumn ? [first] : []), ...dialect.order.map((place) => cells[place])]);

  const lines: string[] = [];
  for (let k = 0; k < dialect.preambleLines; k++) lines.push(PREAMBLE[k % PREAMBLE.length]);
  lines.push(
    arrange(
      names.map((name, k) => UNIT_FORMS[dialect.unitPlace](name, units[k])),
      'Index',
    ),
  );
  // Runs of spaces cannot hold an empty cell: a dash stands for the counter's missing unit.
  if (dialect.unitPlace === 'row') lines.push(arrange(units, dialect.delimiter === 'spaces' ? '-' : ''));
  const count = scan.timeS.length;
  const rowsAt = lines.length;
  for (let k = 0; k < count; k++)
    lines.push(
      arrange(
        [
          write((scan.timeS[k] + (settings.clockStartS ?? 0)) * TIME[dialect.timeUnit]),
          write(temperatureIn(dialect.temperatureUnit, scan.temperatureK[k])),
          write(scan.heatFlowW[k] * factor),
        ],
        String(k + 1),
      ),
    );
  // Flaws at even distances from each other, so that the caller knows where they are.
  for (let f = 1; f <= (flaws?.wordCells ?? 0); f++) {
    const at = rowsAt + Math.floor((f * count) / (flaws!.wordCells! + 1));
    lines[at] = arrange(['overrange', 'overrange', 'overrange'], String(at - rowsAt + 1));
  }
  for (let f = flaws?.repeatedTimes ?? 0; f >= 1; f--) {
    const at = rowsAt + Math.floor((f * count) / (flaws!.repeatedTimes! + 1)) + 1;
    lines.splice(at, 0, lines[at]);
  }
  let text = lines.join(dialect.newline) + dialect.newline;
  if (flaws?.cutAt !== undefined) text = text.slice(0, Math.floor(text.length * flaws.cutAt));
  return encodeText(text, dialect.encoding);
}

/** `digits` significant digits without an exponent. */
function plainNumber(value: number, digits: number): string {
  if (value === 0) return '0';
  const decimals = digits - 1 - Math.floor(Math.log10(Math.abs(value)));
  return value.toFixed(Math.min(100, Math.max(0, decimals)));
}
