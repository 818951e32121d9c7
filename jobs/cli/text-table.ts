/** Widest line of a table on standard output, characters. */
export const LINE_WIDTH = 100;

export interface TextColumn {
  title: string;
  /** Numbers stand to the right. */
  right?: boolean;
  /** The column that is cut (with …) when the whole does not fit the line. */
  shrinks?: boolean;
}

/** Plain aligned text, two spaces between columns, at most LINE_WIDTH characters a line. */
export function textTable(columns: readonly TextColumn[], rows: readonly (readonly string[])[]): string {
  const widths = columns.map((column, i) => Math.max(column.title.length, ...rows.map((row) => row[i].length)));
  const excess = widths.reduce((a, b) => a + b, 2 * (columns.length - 1)) - LINE_WIDTH;
  const shrinking = columns.findIndex((column) => column.shrinks);
  if (excess > 0 && shrinking >= 0) widths[shrinking] = Math.max(8, widths[shrinking] - excess);
  const line = (cells: readonly string[]): string =>
    cells
      .map((cell, i) => {
        const text = cell.length > widths[i] ? `${cell.slice(0, widths[i] - 1)}…` : cell;
        return columns[i].right ? text.padStart(widths[i]) : text.padEnd(widths[i]);
      })
      .join('  ')
      .trimEnd();
  return [line(columns.map((c) => c.title)), line(widths.map((w) => '-'.repeat(w))), ...rows.map(line)]
    .map((text) => `${text}\n`)
    .join('');
}

/** Four significant digits, without an exponent between 0.001 and 1e6. */
export function shortNumber(value: number, digits = 4): string {
  return String(Number(value.toPrecision(digits)));
}
