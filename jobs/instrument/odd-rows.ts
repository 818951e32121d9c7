/** Lines that are not plain rows of numbers: quoted rows are read, blank lines skipped, footers and bad rows kept account of. */
import { quote } from '../../schema/wire/flags.ts';
import { type DecimalMark, decimalMarkOf, numberOf, splitLine } from './cells.ts';
import type { ColumnsBuffer } from './columns-buffer.ts';
import { decodeText, type TextEncoding } from './encoding.ts';
import type { ScanHeader } from './header.ts';

export interface BadLine {
  line: number;
  /** The line as it stands, where it is text */
  text?: string;
  /** What is wrong with it, to be said after its number */
  problem: string;
}

/** Count and the first few of some lines. */
export interface LineTally {
  count: number;
  first: BadLine[];
}

/** How many bad lines are quoted. */
const QUOTED_LINES = 5;

export interface OddRows {
  /** Reads one line (without its end). */
  read(bytes: Uint8Array, line: number): void;
  /** Byte of the decimal mark in use; −1 = none seen so far, or a comma that stands only in quotes because it delimits too. */
  decimalByte(): number;
  /** The decimal mark seen in the file, if any. */
  decimalMark(): DecimalMark;
  /** Call after the last line. */
  finish(): void;
  bad: LineTally;
  /** Lines of text after the last row of numbers; complete only at the end of the file. */
  footer: LineTally;
  /** The last bad line (0 = none): asked when the file ends without a line end. */
  lastBadLine: number;
}

export function createTally(): LineTally {
  return { count: 0, first: [] };
}

export function addToTally(tally: LineTally, line: number, problem: string, text?: string): void {
  tally.count++;
  if (tally.first.length < QUOTED_LINES) tally.first.push({ line, problem, text });
}

export function createOddRows(header: ScanHeader, encoding: TextEncoding, columns: ColumnsBuffer): OddRows {
  let decimal: DecimalMark = header.decimal;
  // Rows stored when the first line of a possible footer came: more rows since then, and it was no footer.
  let rowsBeforeFooter = 0;

  const odd: OddRows = {
    bad: createTally(),
    footer: createTally(),
    lastBadLine: 0,
    decimalByte: () =>
      decimal === undefined || (decimal === ',' && header.delimiter === 'comma') ? -1 : decimal.charCodeAt(0),
    decimalMark: () => decimal,
    finish: settleFooter,
    read(bytes, line) {
      settleFooter();
      const text = decodeText(bytes, encoding);
      const cells = splitLine(text, header.delimiter);
      if (cells.every((cell) => cell === '')) {
        columns.nextRowIsOn(line + 1);
        return;
      }
      const problem = store(cells);
      if (problem === undefined) return;
      columns.nextRowIsOn(line + 1);
      odd.lastBadLine = line;
      if (odd.footer.count > 0 || (columns.rows > 0 && isText(cells))) {
        if (odd.footer.count === 0) rowsBeforeFooter = columns.rows;
        addToTally(odd.footer, line, problem, text.trim());
      } else addToTally(odd.bad, line, problem, text.trim());
    },
  };

  /** Stores a row of numbers, or says what is wrong with it. */
  function store(cells: string[]): string | undefined {
    let count = cells.length;
    while (count > 0 && cells[count - 1] === '') count--;
    if (count > header.cellCount) {
      const twice = header.delimiter === 'comma' && count >= 2 * header.columns.length;
      const hint = twice ? ': if commas are decimal marks here, export with semicolon or tab as delimiter' : '';
      return `has ${count} cells under a header of ${header.cellCount}${hint}`;
    }
    const values: number[] = [];
    let mark = decimal;
    for (const column of header.columns) {
      if (column.index >= count) return `has ${count} cells: the ${column.quantity} is missing`;
      const cell = cells[column.index];
      const value = numberOf(cell, mark);
      if (!Number.isFinite(value)) return `has no number as ${column.quantity}: ${quote(cell)}`;
      mark ??= decimalMarkOf(cell);
      values.push(value);
    }
    decimal = mark;
    if (columns.rows === columns.time.length) columns.grow();
    [columns.time[columns.rows], columns.temperature[columns.rows], columns.heatFlow[columns.rows]] = values;
    columns.rows++;
    settleFooter();
    return undefined;
  }

  /** Text between rows of numbers is no footer but bad lines. */
  function settleFooter(): void {
    const { footer, bad } = odd;
    if (footer.count === 0 || columns.rows === rowsBeforeFooter) return;
    bad.first.push(...footer.first.slice(0, Math.max(0, QUOTED_LINES - bad.first.length)));
    bad.count += footer.count;
    odd.footer = createTally();
  }

  /** A line whose time cell is a word, not a gap and not a mark for a missing number. */
  function isText(cells: string[]): boolean {
    const cell = cells[header.columns[0].index] ?? cells[0];
    return (
      /[\p{L}#]/u.test(cell) && !/^[+-]?(nan|inf|infinity|n\/?a|null|none)$/i.test(cell) && !/^[+-]?[\d.,]/.test(cell)
    );
  }

  return odd;
}
