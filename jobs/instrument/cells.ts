/** Splitting lines into cells, and text cells into numbers: the careful way, used for headers, sheets and odd rows. */
export type Delimiter = 'tab' | 'semicolon' | 'pipe' | 'comma' | 'spaces';

export const DELIMITER_CHARACTERS: Record<Exclude<Delimiter, 'spaces'>, string> = {
  tab: '\t',
  semicolon: ';',
  pipe: '|',
  comma: ',',
};

/**
 * Cells of one line, trimmed. Quoted cells (RFC 4180: `"a,b"`, `""` for a quote) keep delimiters. Runs of spaces count as one
 * delimiter, and none is made of those at the ends.
 */
export function splitLine(line: string, delimiter: Delimiter): string[] {
  if (delimiter === 'spaces') {
    const cells = line.trim();
    return cells === '' ? [] : cells.split(/\s+/).map((cell) => cell.replace(/^"(.*)"$/, '$1'));
  }
  const mark = DELIMITER_CHARACTERS[delimiter];
  if (!line.includes('"')) return line.split(mark).map((cell) => cell.trim());
  return splitRecords(line, mark)[0]?.cells ?? [''];
}

export interface TableRecord {
  /** Line of the record's first character, from 1 */
  line: number;
  cells: string[];
}

/** Records of a delimited text with quoted cells, which may hold delimiters and line ends. A quote that never closes ends with the text. */
export function splitRecords(text: string, mark: string): TableRecord[] {
  const records: TableRecord[] = [];
  let cells: string[] = [];
  let line = 1;
  let recordLine = 1;
  let at = 0;
  while (at <= text.length) {
    while (text[at] === ' ') at++;
    let cell = '';
    if (text[at] === '"') {
      at++;
      for (; at < text.length; at++) {
        if (text[at] === '"') {
          if (text[at + 1] !== '"') break;
          at++;
        } else if (text[at] === '\n' || (text[at] === '\r' && text[at + 1] !== '\n')) line++;
        cell += text[at];
      }
      at++;
    }
    let end = at;
    while (end < text.length && text[end] !== mark && text[end] !== '\n' && text[end] !== '\r') end++;
    cells.push((cell + text.slice(at, end)).trim());
    at = end;
    if (text[at] === mark) {
      at++;
      continue;
    }
    records.push({ line: recordLine, cells });
    cells = [];
    if (text[at] === '\r' && text[at + 1] === '\n') at++;
    at++;
    recordLine = ++line;
    if (at >= text.length) break;
  }
  return records;
}

// Each digit can match in one place only: a cell of many digits must not be tried in all ways.
const NUMBER = /^[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?$/;
const NUMBER_WITH_COMMA = /^[+-]?(?:\d+,\d*|,\d+)(?:[eE][+-]?\d+)?$/;

export type DecimalMark = '.' | ',' | undefined;

/**
 * Number of a cell, or NaN. `decimal` is the mark in use; undefined = none seen so far, either is taken.
 * A typographic minus counts as a minus; a cell with both marks (thousands) is not a number.
 */
export function numberOf(cell: string, decimal: DecimalMark): number {
  const text = cell.replace(/^[\u2212\u2013]/, '-');
  if (NUMBER.test(text)) return decimal === ',' && text.includes('.') ? Number.NaN : Number(text);
  if (decimal !== '.' && NUMBER_WITH_COMMA.test(text)) return Number(text.replace(',', '.'));
  return Number.NaN;
}

/** The decimal mark that a cell with a number shows, if any. */
export function decimalMarkOf(cell: string): DecimalMark {
  return cell.includes(',') ? ',' : cell.includes('.') ? '.' : undefined;
}
