/**
 * Rows of numbers straight from bytes into columns: no text and no object per row. A row that is anything but plain numbers between
 * plain delimiters (quotes, a cell missing, words) is left to `readOddRow`, which alone decides what is wrong with a row.
 */

import { DELIMITER_CHARACTERS } from './cells.ts';
import { ColumnsBuffer, ROW_LIMIT } from './columns-buffer.ts';
import type { TextEncoding } from './encoding.ts';
import type { ScanHeader } from './header.ts';
import { createOddRows, type OddRows } from './odd-rows.ts';

/** Longest line, bytes. */
export const LINE_LIMIT = 65_536;

const TAB = 9;
const LF = 10;
const CR = 13;
const SPACE = 32;
const QUOTE = 34;
const PLUS = 43;
const MINUS = 45;
const UPPER_E = 69;
const LOWER_E = 101;

/** Powers of ten that a double holds exactly. */
const POWERS = Float64Array.from({ length: 23 }, (_, i) => Number(`1e${i}`));
/** Every integer of so many digits is exact in a double. */
const EXACT_DIGITS = 15;

export type RowStop = 'rows' | 'line' | undefined;

export class RowParser {
  readonly columns = new ColumnsBuffer();
  readonly odd: OddRows;
  /** Line that starts at the next byte */
  line: number;
  /** Why parsing stopped for good: too many rows, or a line too long. */
  stop: RowStop;
  private readonly delimiter: number;
  /** 0 = not needed, 1 time, 2 temperature, 3 heat flow */
  private readonly roles: Uint8Array;
  private readonly cellCount: number;

  constructor(header: ScanHeader, encoding: TextEncoding) {
    this.line = header.dataLine;
    this.cellCount = header.cellCount;
    this.delimiter = header.delimiter === 'spaces' ? SPACE : DELIMITER_CHARACTERS[header.delimiter].charCodeAt(0);
    this.roles = new Uint8Array(Math.max(...header.columns.map((c) => c.index)) + 1);
    header.columns.forEach((column, i) => {
      this.roles[column.index] = i + 1;
    });
    this.odd = createOddRows(header, encoding, this.columns);
    this.columns.nextRowIsOn(this.line);
  }

  /**
   * Parses whole lines: bytes [from, to) of `b`, where b[to − 1] ends a line.
   * A number of at most 15 digits and a power of ten within 10^±22 is one exact integer times or over one exact power, hence rounded once,
   * as `Number` rounds (Clinger 1990, "How to read floating point numbers accurately", PLDI); any other goes through `Number`.
   */
  parse(b: Uint8Array, from: number, to: number): void {
    const { delimiter, roles, cellCount, columns } = this;
    const needed = roles.length;
    const spaced = delimiter === SPACE;
    const tabIsBlank = delimiter !== TAB;
    let decimal = this.odd.decimalByte();
    let { time, temperature, heatFlow } = columns;
    let p = from;
    while (p < to) {
      const start = p;
      let column = 0;
      let filled = 0;
      let found = 0;
      let fault = false;
      let t = 0;
      let k = 0;
      let q = 0;
      let c = b[p];
      for (;;) {
        while (c === SPACE || (c === TAB && tabIsBlank)) c = b[++p];
        const cellStart = p;
        const role = column < needed ? roles[column] : 0;
        if (role !== 0) {
          const negative = c === MINUS;
          if (negative || c === PLUS) c = b[++p];
          let mantissa = 0;
          let mark = p;
          let d = c - 48;
          while (d >= 0 && d <= 9) {
            mantissa = mantissa * 10 + d;
            d = (c = b[++p]) - 48;
          }
          let digits = p - mark;
          let scale = 0;
          if (c === decimal) {
            mark = p + 1;
            d = (c = b[++p]) - 48;
            while (d >= 0 && d <= 9) {
              mantissa = mantissa * 10 + d;
              d = (c = b[++p]) - 48;
            }
            scale = mark - p;
            digits -= scale;
          }
          if (digits === 0) {
            fault = true;
            break;
          }
          if (c === LOWER_E || c === UPPER_E) {
            c = b[++p];
            const down = c === MINUS;
            if (down || c === PLUS) c = b[++p];
            let exponent = 0;
            mark = p;
            d = c - 48;
            while (d >= 0 && d <= 9) {
              if (exponent < 100_000) exponent = exponent * 10 + d;
              d = (c = b[++p]) - 48;
            }
            if (p === mark) {
              fault = true;
              break;
            }
            scale += down ? -exponent : exponent;
          }
          let value: number;
          if (digits <= EXACT_DIGITS && scale >= -22 && scale <= 22) {
            value = scale < 0 ? mantissa / POWERS[-scale] : mantissa * POWERS[scale];
            if (negative) value = -value;
          } else {
            value = numberFromBytes(b, cellStart, p, decimal);
            if (!Number.isFinite(value)) {
              fault = true;
              break;
            }
          }
          if (role === 1) t = value;
          else if (role === 2) k = value;
          else q = value;
          found |= 1 << role;
          filled = column + 1;
          // Blanks may pad a number; where blanks delimit, one of them or the line's end must follow.
          const end = p;
          while (c === SPACE || (c === TAB && tabIsBlank)) c = b[++p];
          if (spaced && p === end && c !== LF && c !== CR) {
            fault = true;
            break;
          }
        } else {
          while (c !== delimiter && c !== LF && c !== CR && c !== QUOTE && !(spaced && c === TAB)) c = b[++p];
          if (c === QUOTE) {
            fault = true;
            break;
          }
          if (p > cellStart) filled = column + 1;
          if (spaced) while (c === SPACE || c === TAB) c = b[++p];
        }
        if (c === LF || c === CR) break;
        if (spaced) column++;
        else if (c === delimiter) {
          column++;
          c = b[++p];
        } else {
          fault = true;
          break;
        }
      }
      if (!fault && found === 14 && filled <= cellCount && p - start <= LINE_LIMIT) {
        const row = columns.rows;
        if (row === time.length) {
          columns.grow();
          ({ time, temperature, heatFlow } = columns);
        }
        time[row] = t;
        temperature[row] = k;
        heatFlow[row] = q;
        columns.rows = row + 1;
      } else {
        while (b[p] !== LF && b[p] !== CR) p++;
        if (p - start > LINE_LIMIT) {
          this.stop = 'line';
          return;
        }
        this.odd.read(b.subarray(start, p), this.line);
        decimal = this.odd.decimalByte();
        ({ time, temperature, heatFlow } = columns);
      }
      if (columns.rows > ROW_LIMIT) {
        this.stop = 'rows';
        return;
      }
      this.line++;
      p += b[p] === CR && p + 1 < to && b[p + 1] === LF ? 2 : 1;
    }
  }
}

function numberFromBytes(b: Uint8Array, from: number, to: number, decimal: number): number {
  let text = '';
  for (let i = from; i < to; i++) text += b[i] === decimal ? '.' : String.fromCharCode(b[i]);
  return Number(text);
}
