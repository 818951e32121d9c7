/** Markdown table and order statistics for the studies' print-outs. */
export function markdownTable(header: readonly string[], rows: readonly (readonly (string | number)[])[]): string {
  const line = (cells: readonly (string | number)[]): string => `| ${cells.join(' | ')} |`;
  return [line(header), line(header.map(() => '---')), ...rows.map(line)].join('\n');
}

/** Quantile by linear interpolation between order statistics; NaN of nothing. */
export function quantile(values: readonly number[], share: number): number {
  if (values.length === 0) return Number.NaN;
  const sorted = [...values].sort((a, b) => a - b);
  const at = share * (sorted.length - 1);
  const low = Math.floor(at);
  return sorted[low] + (at - low) * ((sorted[low + 1] ?? sorted[low]) - sorted[low]);
}

export const percent = (value: number, digits = 2): string =>
  Number.isFinite(value) ? `${(100 * value).toFixed(digits)} %` : '–';
