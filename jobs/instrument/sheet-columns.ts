/** How the cells of the sheets' columns are understood and checked, and what happens to rows that say a thing twice. */
import { type Flag, flag } from '../../schema/wire/flags.ts';
import { pathProblem } from './paths.ts';
import type { ColumnKind, SheetCells } from './sheet-table.ts';
import type { Quantity } from './units.ts';

/** Longest name of a sample, instrument or series, characters. */
const NAME_LIMIT = 200;

export const text: ColumnKind = { kind: 'text' };
export const name: ColumnKind = { kind: 'text', check: nameProblem };
export const path: ColumnKind = { kind: 'text', check: pathProblem };

export const any = (quantity: Quantity): ColumnKind => ({ kind: 'number', quantity });
export const above = (quantity: Quantity, limit: number): ColumnKind => ({
  kind: 'number',
  quantity,
  check: (value) => (value > limit ? undefined : `it must be above ${limit}`),
});
export const notBelow = (quantity: Quantity): ColumnKind => ({
  kind: 'number',
  quantity,
  check: (value) => (value >= 0 ? undefined : 'it must not be below 0'),
});
export const rate: ColumnKind = {
  kind: 'number',
  quantity: 'rate',
  check: (value) => (value === 0 ? 'a heating rate is not 0; leave it empty for a hold' : undefined),
};
export const counted: ColumnKind = {
  kind: 'number',
  quantity: 'number',
  check: (value) => (Number.isInteger(value) && value >= 1 ? undefined : 'it is counted 1, 2, 3 …'),
};
export const fraction: ColumnKind = {
  kind: 'number',
  quantity: 'number',
  check: (value) =>
    value >= 0 && value <= 1 ? undefined : 'it must lie in 0 … 1 (write % in the header for per cent)',
};

export function withLine<Row>({ line, cells }: SheetCells): Row {
  return { ...cells, line } as unknown as Row;
}

/** Rows without those that say again what an earlier row is about; a later row is flagged, even when it says the same. */
export function firstOfEach<Row extends { line: number }>(
  rows: Row[],
  keyOf: (row: Row) => string,
  file: string,
  flags: Flag[],
): Row[] {
  const seen = new Map<string, number>();
  return rows.filter((row) => {
    const key = keyOf(row);
    const first = seen.get(key);
    if (first === undefined) {
      seen.set(key, row.line);
      return true;
    }
    flags.push(
      flag(
        'sheet-damaged',
        `line ${row.line} names ${key} again, as line ${first} does; only line ${first} counts`,
        'Delete one of the two rows.',
        { file },
      ),
    );
    return false;
  });
}

/** Names go into result files, where a cell must not start like a formula. */
function nameProblem(value: string): string | undefined {
  if (value.length > NAME_LIMIT) return `is longer than ${NAME_LIMIT} characters`;
  if (/\p{Cc}/u.test(value)) return 'holds a control character or a line break';
  return /^[=+\-@]/.test(value) ? `starts with ${value[0]}, like a formula in a spreadsheet` : undefined;
}
