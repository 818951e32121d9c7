/** Text of a scan in any dialect, written by other means than the reader uses. */
export interface Dialect {
  delimiter: '\t' | ';' | ',' | '|' | ' ' | '   ';
  decimal: '.' | ',';
  lineEnd: '\n' | '\r' | '\r\n';
  encoding: 'utf8' | 'utf8-mark' | 'utf16le' | 'utf16le-mark' | 'utf16be' | 'utf16be-mark' | 'latin1';
}

export function encode(text: string, encoding: Dialect['encoding']): Uint8Array {
  const body = encoding.endsWith('-mark') ? `\ufeff${text}` : text;
  if (encoding.startsWith('utf8')) return new Uint8Array(Buffer.from(body, 'utf8'));
  if (encoding === 'latin1') return new Uint8Array(Buffer.from(body, 'latin1'));
  const pairs = Buffer.from(body, 'utf16le');
  return new Uint8Array(encoding.startsWith('utf16be') ? pairs.swap16() : pairs);
}

export function tableText(
  { delimiter, decimal, lineEnd }: Pick<Dialect, 'delimiter' | 'decimal' | 'lineEnd'>,
  head: string[],
  header: string[],
  rows: string[][],
): string {
  const lines = [
    ...head,
    header.join(delimiter),
    ...rows.map((row) => row.map((cell) => cell.replace('.', decimal)).join(delimiter)),
  ];
  return lines.join(lineEnd) + lineEnd;
}

/** A sound scan of so many rows as text: comma, point, LF, header on line 1. `change` edits the rows (0-based) on the way. */
export function plainScan(rows: number, change: (cells: string[], row: number) => string[] = (cells) => cells): string {
  const lines = ['time [s],temperature [°C],heat flow [mW]'];
  for (let i = 0; i < rows; i++)
    lines.push(change([String(i * 0.5), (25 + i * 0.1).toFixed(3), Math.sin(i / 40).toFixed(6)], i).join(','));
  return `${lines.join('\n')}\n`;
}
