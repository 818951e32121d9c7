/** A sheet as typed by a person: dialect, header, and each row's cells checked and turned to SI. Shared by all sheets. */
import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import {
  DELIMITER_CHARACTERS,
  type DecimalMark,
  type Delimiter,
  numberOf,
  splitLine,
  splitRecords,
  type TableRecord,
} from './cells.ts';
import { decodeFile } from './encoding.ts';
import { nameAndUnit, plainName } from './header-cell.ts';
import { LINE_LIMIT } from './row-parser.ts';
import { offeredUnits, type Quantity, toSi, type Unit, unitOf } from './units.ts';

/** How a cell of a sheet column is understood. */
export type ColumnKind =
  | { kind: 'text'; check?: (text: string) => string | undefined }
  | { kind: 'choice'; values: readonly string[] }
  | { kind: 'number'; quantity: Quantity; check?: (valueSi: number) => string | undefined };

export interface SheetColumn {
  key: string;
  /** Header as the README writes it, in lower case */
  name: string;
  kind: ColumnKind;
  required?: boolean;
}

export interface SheetCells {
  line: number;
  cells: Record<string, string | number>;
}

export interface SheetTable {
  rows: SheetCells[];
  flags: Flag[];
}

interface UsedColumn {
  column: SheetColumn;
  index: number;
  header: string;
  unit?: Unit;
}

const DELIMITERS: readonly Delimiter[] = ['tab', 'semicolon', 'pipe', 'comma'];
/** Records looked at for the header row. */
const HEADER_WITHIN = 50;
/** `1,234`: a decimal comma or a thousands separator. */
const THOUSANDS = /^[+-]?[1-9]\d{0,2}(,\d{3})+$/;

/** Reads every row that can be read; what cannot is a flag `sheet-damaged` that quotes cell and line. */
export function readSheet(bytes: Uint8Array, file: string, columns: readonly SheetColumn[]): SheetTable {
  const flags: Flag[] = [];
  const damaged = (detail: string, action: string) => flags.push(flag('sheet-damaged', detail, action, { file }));
  const text = decodeFile(bytes);
  const required = columns.filter((c) => c.required).map((c) => c.name);
  if (text.includes('\0')) {
    damaged(
      'the sheet is no text',
      `Save it as delimited text (CSV) with the columns ${required.join(', ')} and send it again.`,
    );
    return { rows: [], flags };
  }
  const lines = text.split(/\r\n|\r|\n/);
  const tooLong = lines.findIndex((line) => line.length > LINE_LIMIT);
  if (tooLong !== -1) {
    damaged(
      `line ${tooLong + 1} has ${lines[tooLong].length} characters, more than the ${LINE_LIMIT} a line may have; it starts with ${quote(lines[tooLong].slice(0, 80).trim())}`,
      'Save the sheet as delimited text (CSV) with one row a line.',
    );
    return { rows: [], flags };
  }
  const found = findSheetHeader(text, lines, columns);
  if (found === undefined) {
    const first = lines.find((l) => l.trim() !== '');
    damaged(
      first === undefined
        ? 'the sheet is empty'
        : `the sheet has no header row with ${required.join(', ')}; it starts with ${quote(first.trim())}`,
      `Give its first row these headers: ${columns.map((c) => c.name).join(', ')}.`,
    );
    return { rows: [], flags };
  }
  const { records, above, header, spaces } = found;
  const lost = above.filter(({ cells }) => cells.length === header.cells.length && cells.length > 1);
  if (lost.length > 0)
    damaged(
      `${lost.length} ${lost.length === 1 ? 'row' : 'rows'} above the header on line ${header.line} not read, from line ${lost[0].line} on: ${quote(lost[0].cells.join(', '))}`,
      'Move the header row to the top.',
    );
  if (lost.length === 0 && records.every(({ cells }) => cells.every((cell) => cell === '')))
    damaged(`no row stands below the header on line ${header.line}`, 'Fill in rows, or leave the sheet out.');
  const used = useColumns(header, columns, file, flags);
  const decimal = decimalOf(records, used);
  const rows: SheetCells[] = [];
  for (const { line, cells } of records) {
    if (cells.every((cell) => cell === '')) continue;
    const problem = (
      spaces
        ? cells.length !== header.cells.length
        : cells.slice(header.cells.length).some((c) => c !== '')
    )
      ? {
          detail: `has ${cells.length} cells under a header of ${header.cells.length}`,
          action: 'Put cells that hold the delimiter in double quotes.',
        }
      : undefined;
    const read = problem ?? readRow(cells, used, columns, decimal);
    if ('detail' in read) damaged(`line ${line} ${read.detail}`, `${read.action} The other rows were read.`);
    else rows.push({ line, cells: read.cells });
  }
  return { rows, flags };
}

function findSheetHeader(
  text: string,
  lines: readonly string[],
  columns: readonly SheetColumn[],
): { header: TableRecord; above: TableRecord[]; records: TableRecord[]; spaces: boolean } | undefined {
  const names = new Set(columns.map((c) => c.name));
  const required = columns.filter((c) => c.required).map((c) => c.name);
  const isHeader = (record: TableRecord): boolean => {
    const named = record.cells.flatMap((cell) => namesOf(cell).filter((name) => names.has(name)));
    return required.every((name) => named.includes(name));
  };
  // One way at a time: a long sheet split in all ways at once would fill the memory.
  const delimited = DELIMITERS.map((d) => ({
    split: () => splitRecords(text, DELIMITER_CHARACTERS[d as Exclude<Delimiter, 'spaces'>]),
    spaces: false,
  }));
  const bySpaces = (split: (line: string) => string[]) => ({
    split: () => lines.map((l, i) => ({ line: i + 1, cells: split(l) })),
    spaces: true,
  });
  // Names may hold single spaces: two or more are tried as delimiter first.
  const ways = [
    ...delimited,
    bySpaces((l) => (l.trim() === '' ? [] : l.trim().split(/\s{2,}|\t/))),
    bySpaces((l) => splitLine(l, 'spaces')),
  ];
  const headerOf = ({ split, spaces }: { split: () => TableRecord[]; spaces: boolean }, fewestCells: number) => {
    const records = split();
    const at = records.slice(0, HEADER_WITHIN).findIndex(isHeader);
    if (at === -1 || records[at].cells.length < fewestCells) return undefined;
    return { header: records[at], above: records.slice(0, at), records: records.slice(at + 1), spaces };
  };
  // A sheet with one required column is delimited in any way; the first with a second column, or else the first, is taken.
  for (const way of ways) {
    const found = headerOf(way, required.length > 1 ? 1 : 2);
    if (found) return found;
  }
  return headerOf(ways[0], 1);
}

/** The names a header cell can mean, in plain form. */
function namesOf(cell: string): string[] {
  return nameAndUnit(cell).map((reading) => columnName(reading.name));
}

function columnName(name: string): string {
  return plainName(name).replace('crystallisation', 'crystallization');
}

/** Which cell feeds which column; unknown headers are noted, unknown or missing units flagged and their column left out. */
function useColumns(header: TableRecord, columns: readonly SheetColumn[], file: string, flags: Flag[]): UsedColumn[] {
  const used: UsedColumn[] = [];
  const unknown: string[] = [];
  header.cells.forEach((cell, index) => {
    if (cell === '') return;
    const readings = nameAndUnit(cell).flatMap(({ name, unit }) => {
      const column = columns.find((c) => c.name === columnName(name));
      return column === undefined ? [] : [{ column, unitText: unit }];
    });
    if (readings.length === 0) {
      unknown.push(cell);
      return;
    }
    const { column } = readings[0];
    if (column.kind.kind !== 'number') {
      used.push({ column, index, header: cell });
      return;
    }
    const { quantity } = column.kind;
    const unit = readings
      .map((r) => unitOf(quantity, r.unitText ?? (quantity === 'number' ? '1' : '')))
      .find((u) => u !== undefined);
    if (unit !== undefined) {
      used.push({ column, index, header: cell, unit });
      return;
    }
    const unitText = readings[0].unitText;
    flags.push(
      flag(
        'sheet-damaged',
        `the column ${quote(cell)} (line ${header.line}) ${unitText === undefined ? 'states no unit' : `has the unit ${quote(unitText)}, which is not known`}; its values were not used`,
        `Write the header as ${column.name} [unit] with one of ${offeredUnits(quantity)}.`,
        { file },
      ),
    );
  });
  if (unknown.length > 0)
    flags.push(
      flag(
        'sheet-column-unused',
        `columns not used: ${unknown.map(quote).join(' ')} (line ${header.line})`,
        `Nothing to do if they are your own notes; the sheet's columns are ${columns.map((c) => c.name).join(', ')}.`,
        { file },
      ),
    );
  return used;
}

/** A comma marks decimals when some number shows one that cannot be a thousands separator. */
function decimalOf(records: readonly TableRecord[], used: readonly UsedColumn[]): DecimalMark {
  for (const { cells } of records)
    for (const { column, index } of used) {
      const cell = cells[index] ?? '';
      if (column.kind.kind !== 'number' || cell === '') continue;
      if (cell.includes('.') && !Number.isNaN(numberOf(cell, '.'))) return '.';
      if (cell.includes(',') && !THOUSANDS.test(cell) && !Number.isNaN(numberOf(cell, ','))) return ',';
    }
  return undefined;
}

type Problem = { detail: string; action: string };

function readRow(
  cells: readonly string[],
  used: readonly UsedColumn[],
  columns: readonly SheetColumn[],
  decimal: DecimalMark,
): { cells: SheetCells['cells'] } | Problem {
  const values: SheetCells['cells'] = {};
  for (const { column, index, header, unit } of used) {
    const cell = cells[index] ?? '';
    if (cell === '') continue;
    const value = readCell(cell, header, column, unit, decimal);
    if (typeof value === 'object') return value;
    const other = values[column.key];
    if (other !== undefined && !same(other, value))
      return {
        detail: `gives ${column.name} twice: ${quote(cell)} under ${quote(header)} is not what another column says.`,
        action: 'Leave one of the two cells empty.',
      };
    values[column.key] = value;
  }
  const missing = columns.filter((c) => c.required && values[c.key] === undefined).map((c) => c.name);
  if (missing.length > 0)
    return {
      detail: `${quote(cells.join(', '))} has no ${missing.join(' and no ')}.`,
      action: `Fill in ${missing.join(' and ')}.`,
    };
  return { cells: values };
}

function readCell(
  cell: string,
  header: string,
  column: SheetColumn,
  unit: Unit | undefined,
  decimal: DecimalMark,
): string | number | Problem {
  const where = `has ${quote(cell)} under ${quote(header)}`;
  const { kind } = column;
  if (kind.kind === 'choice') {
    const value = cell.toLowerCase();
    return kind.values.includes(value)
      ? value
      : {
          detail: `${where}: not one of ${kind.values.join(', ')}.`,
          action: `Write one of ${kind.values.join(', ')}, or leave the cell empty.`,
        };
  }
  if (kind.kind === 'text') {
    const text = cell.normalize('NFC');
    const problem = kind.check?.(text);
    return problem === undefined ? text : { detail: `${where}: it ${problem}.`, action: 'Change the cell.' };
  }
  if (decimal === undefined && THOUSANDS.test(cell))
    return {
      detail: `${where}: the comma can mark decimals or thousands.`,
      action: 'Write the number without a thousands separator.',
    };
  const number = numberOf(cell, decimal);
  const value = unit === undefined ? number : toSi(number, unit);
  if (!Number.isFinite(value))
    return {
      detail: `${where}: not a number${decimal === undefined ? '' : ` with ${decimal === ',' ? 'a decimal comma' : 'a decimal point'}, as the sheet has it elsewhere`}.`,
      action: 'Write a plain number; the unit stands in the header.',
    };
  const problem = kind.check?.(value);
  return problem === undefined
    ? value
    : { detail: `${where}: ${problem}.`, action: 'Correct the number or the unit in the header.' };
}

function same(a: string | number, b: string | number): boolean {
  return a === b || (typeof a === 'number' && typeof b === 'number' && Math.abs(a - b) <= 1e-6 * Math.abs(a));
}
