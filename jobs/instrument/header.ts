/** Finding the header row and the dialect of an instrument text in its head. */
import { quote } from '../../schema/wire/flags.ts';
import type { ReadRefusal } from '../../schema/wire/scan.ts';
import type { ExothermDirection } from '../../schema/wire/states.ts';
import { DELIMITER_CHARACTERS, type DecimalMark, type Delimiter, decimalMarkOf, numberOf, splitLine } from './cells.ts';
import { directionOf } from './direction.ts';
import { type HeaderCell, readHeaderCell, SCAN_QUANTITIES, type ScanQuantity } from './header-cell.ts';
import { offeredUnits, type Unit, unitOf } from './units.ts';

export interface HeadLine {
  text: string;
  /** From 1 */
  line: number;
  /** Byte offset of the line after this one */
  next: number;
}

export interface ScanColumn {
  quantity: ScanQuantity;
  /** 0-based cell */
  index: number;
  header: string;
  unit: Unit;
}

export interface ScanHeader {
  line: number;
  /** Line and byte offset of the first line after header and unit row */
  dataLine: number;
  dataOffset: number;
  delimiter: Delimiter;
  decimal: DecimalMark;
  /** Cells of the header row */
  cellCount: number;
  /** time, temperature, heat flow */
  columns: ScanColumn[];
  unused: string[];
  exotherm?: ExothermDirection;
  /** Set where two places say opposite directions; `exotherm` is then undefined. */
  directionConflict?: string;
}

/** Why no header was found; `matched` = a header row was found but no row of numbers under it. */
export type HeaderSearch = { header: ScanHeader; matched: boolean } | { refusal: ReadRefusal };

/** Lines after the header looked at for the first row of numbers. */
const ROWS_TRIED = 10;
/** Lines behind a header that can bear on it: for the first row of numbers, then for the decimal mark. */
export const LINES_TRIED = 2 * ROWS_TRIED;
const DELIMITERS: readonly Delimiter[] = ['tab', 'semicolon', 'pipe', 'comma', 'spaces'];

/**
 * The header is the first row whose cells name a time, a temperature and a heat flow, each with a unit in the cell or in the row
 * below, and under which rows of numbers follow. Without such rows the first full header found is returned with `matched: false`.
 */
export function findHeader(lines: readonly HeadLine[]): HeaderSearch {
  let unmatched: ScanHeader | undefined;
  let nearest: Candidate | undefined;
  for (let i = 0; i < lines.length; i++) {
    // Every header names a time (t, time, temps, Zeit) and lines of numbers hold neither letter.
    if (!/[tz]/i.test(lines[i].text)) continue;
    for (const delimiter of DELIMITERS) {
      for (const cells of headerCells(lines[i].text, delimiter)) {
        const candidate = readCandidate(lines, i, delimiter, cells);
        if (candidate.header === undefined) {
          if (nearest === undefined || candidate.score > nearest.score) nearest = candidate;
          continue;
        }
        const row = firstRow(lines, candidate.header);
        if (row !== undefined) {
          candidate.header.decimal = decimalOf(lines, candidate.header, row);
          return { header: withDirection(candidate.header, lines.slice(0, i), cells), matched: true };
        }
        unmatched ??= withDirection(candidate.header, lines.slice(0, i), cells);
      }
    }
  }
  if (unmatched !== undefined) return { header: unmatched, matched: false };
  return { refusal: refusalOf(nearest, lines) };
}

/** Ways to cut a header row into cells. Names hold single spaces, so spaces as delimiter are tried wide first, then behind brackets, then all. */
function headerCells(text: string, delimiter: Delimiter): string[][] {
  const bare = text.replace(/^\s*[#%!]+\s*/, '');
  if (delimiter !== 'spaces') return bare.includes(DELIMITER_CHARACTERS[delimiter]) ? [splitLine(bare, delimiter)] : [];
  const line = bare.trim();
  // Spaces inside brackets and before them belong to the cell.
  const kept = line.replace(/\s*[[(][^\])]*[\])]/g, (group) => group.replace(/\s+/g, '\u00a0'));
  const ways = [
    kept.split(/[ \t]{2,}/),
    kept.split(/(?<=[\])])[ \t]+/),
    kept.replace(/(heat)[ \t]+(flow|flux)/gi, '$1\u00a0$2').split(/[ \t]+/),
  ];
  return ways.filter((way) => way.length >= 3).map((way) => way.map((cell) => cell.replaceAll('\u00a0', ' ').trim()));
}

interface Candidate {
  header?: ScanHeader;
  /** Quantities named, then units known: how near this row came to being a header */
  score: number;
  line: HeadLine;
  missing: ScanQuantity[];
  unitProblem?: { cell: string; line: number; quantity: ScanQuantity; unit?: string };
}

function readCandidate(lines: readonly HeadLine[], at: number, delimiter: Delimiter, cells: string[]): Candidate {
  const named = cells.map((cell, index) => ({ index, cell: readHeaderCell(cell) }));
  const missing = SCAN_QUANTITIES.filter((q) => !named.some((n) => n.cell?.quantity === q));
  const candidate: Candidate = { score: 3 - missing.length, line: lines[at], missing };
  if (missing.length > 0) return candidate;
  const below = lines.slice(at + 1, at + 5).find((l) => l.text.trim() !== '');
  const unitCells = below === undefined ? [] : unitRowCells(below.text, delimiter, cells.length);
  const columns: ScanColumn[] = [];
  let unitRowUsed = false;
  for (const quantity of SCAN_QUANTITIES) {
    const options = named.flatMap(({ index, cell }) => {
      if (cell?.quantity !== quantity) return [];
      const fromBelow = cell.unit === undefined ? unitOf(quantity, unitCells[index] ?? '') : undefined;
      return [{ index, cell, unit: cell.unit ?? fromBelow, below: fromBelow !== undefined }];
    });
    const known = options.filter((o) => o.unit !== undefined).sort((a, b) => a.cell.rank - b.cell.rank);
    if (known.length === 0) {
      candidate.unitProblem ??= unitProblem(options[0], lines[at], below, unitCells);
      continue;
    }
    const { index, cell, unit, below: isBelow } = known[0];
    columns.push({ quantity, index, header: cell.text, unit: unit as Unit });
    unitRowUsed ||= isBelow;
    candidate.score++;
  }
  if (columns.length < SCAN_QUANTITIES.length) return candidate;
  const last = below !== undefined && (unitRowUsed || isUnitRow(unitCells, columns)) ? below : lines[at];
  candidate.header = {
    line: lines[at].line,
    dataLine: last.line + 1,
    dataOffset: last.next,
    delimiter,
    decimal: undefined,
    cellCount: cells.length,
    columns,
    unused: cells.filter((cell, index) => cell !== '' && !columns.some((c) => c.index === index)),
  };
  return candidate;
}

/** One unit in a row of units parted by spaces: a bracket, or a word that may hold brackets with spaces, as `J/(s g)`. */
const SPACED_UNIT = /\[[^\]]*\]|\((?:[^()]|\([^)]*\))*\)|(?:[^\s(]|\([^)]*\))+/g;

/** Cells of the row below a header when they can be units: none of them a number. */
function unitRowCells(text: string, delimiter: Delimiter, count: number): string[] {
  const all = delimiter === 'spaces' ? (text.match(SPACED_UNIT) ?? []) : splitLine(text, delimiter);
  const cells = all.slice(0, count);
  return cells.some((cell) => !Number.isNaN(numberOf(cell, undefined))) ? [] : cells;
}

function isUnitRow(cells: string[], columns: ScanColumn[]): boolean {
  return cells.length > 0 && columns.some((c) => unitOf(c.quantity, cells[c.index] ?? '') !== undefined);
}

function unitProblem(
  option: { index: number; cell: HeaderCell },
  line: HeadLine,
  below: HeadLine | undefined,
  unitCells: string[],
): NonNullable<Candidate['unitProblem']> {
  const { cell, index } = option;
  const underneath = (unitCells[index] ?? '').replace(/^[[(](.*)[\])]$/, '$1').trim();
  if (underneath !== '' && below !== undefined && cell.unknownUnit === undefined)
    return { cell: cell.text, line: below.line, quantity: cell.quantity, unit: underneath };
  return { cell: cell.text, line: line.line, quantity: cell.quantity, unit: cell.unknownUnit };
}

/** The first line of numbers under a header, cut as the header is; undefined = none near. */
function firstRow(lines: readonly HeadLine[], header: ScanHeader): HeadLine | undefined {
  const from = lines.findIndex((l) => l.line >= header.dataLine);
  if (from === -1) return undefined;
  return lines.slice(from, from + ROWS_TRIED).find((l) => {
    const cells = splitLine(l.text, header.delimiter);
    // Names with single spaces can be cut in more than one way: the rows decide.
    if (header.delimiter === 'spaces' && cells.length !== header.cellCount) return false;
    return header.columns.every((c) => !Number.isNaN(numberOf(cells[c.index] ?? '', undefined)));
  });
}

function decimalOf(lines: readonly HeadLine[], header: ScanHeader, first: HeadLine): DecimalMark {
  // A bare comma that delimits cannot mark decimals; quoted ones are found row by row.
  for (const l of lines.slice(lines.indexOf(first), lines.indexOf(first) + ROWS_TRIED)) {
    const cells = splitLine(l.text, header.delimiter);
    for (const c of header.columns) {
      const mark = decimalMarkOf(cells[c.index] ?? '');
      if (mark !== undefined && !Number.isNaN(numberOf(cells[c.index], mark))) return mark;
    }
  }
  return undefined;
}

/** Direction from the header row where it says one, else from the lines before it. */
function withDirection(header: ScanHeader, preamble: readonly HeadLine[], cells: string[]): ScanHeader {
  const inHeader = cells.map((text) => ({ text, line: header.line }));
  for (const places of [inHeader, preamble]) {
    const said = places.flatMap((p) => {
      const exotherm = directionOf(p.text);
      return exotherm === undefined ? [] : [{ exotherm, where: `line ${p.line} ${quote(p.text.trim())}` }];
    });
    if (said.length === 0) continue;
    const other = said.find((s) => s.exotherm !== said[0].exotherm);
    return other === undefined
      ? { ...header, exotherm: said[0].exotherm }
      : { ...header, directionConflict: `${said[0].where} against ${other.where}` };
  }
  return header;
}

const NAMED_AS = { time: 'a time', temperature: 'a temperature', 'heat flow': 'a heat flow' } as const;
const HEADER_ADVICE =
  'Add a header row that names time, temperature and heat flow with units, e.g. time [s]; temperature [°C]; heat flow [mW].';

function refusalOf(nearest: Candidate | undefined, lines: readonly HeadLine[]): ReadRefusal {
  if (nearest?.unitProblem !== undefined) {
    const { cell, line, quantity, unit } = nearest.unitProblem;
    const column = `the ${quantity} column ${quote(cell)}`;
    return {
      code: 'unit-unknown',
      reason:
        unit === undefined
          ? `${column} (line ${line}) states no unit`
          : `the unit ${quote(unit)} (line ${line}) of ${column} is not known`,
      action: `Write one of ${offeredUnits(quantity)} in square brackets behind the column's name or in the row below it, and send the file again.`,
      line,
    };
  }
  if (nearest !== undefined && nearest.score > 0) {
    const missing = nearest.missing.map((q) => NAMED_AS[q]).join(' and ');
    return {
      code: 'file-damaged',
      reason: `no header row: line ${nearest.line.line} ${quote(nearest.line.text.trim())} comes nearest, but no cell of it names ${missing}`,
      action: HEADER_ADVICE,
      line: nearest.line.line,
    };
  }
  const first = lines.find((l) => l.text.trim() !== '');
  const found = first === undefined ? '' : `; the text starts with ${quote(first.text.trim())} (line ${first.line})`;
  return {
    code: 'file-damaged',
    reason: `no header row that names time, temperature and heat flow among ${lines.length} lines${found}`,
    action: HEADER_ADVICE,
    line: first?.line,
  };
}
