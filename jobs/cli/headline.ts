import type { ResultRow } from '../store/index.ts';
import { shortNumber, textTable } from './text-table.ts';

/** The one number by which each method is quoted in a summary. */
export const HEADLINES = [
  { quantity: 'activation_energy', method: 'kissinger', title: 'E Kissinger' },
  { quantity: 'activation_energy', method: 'friedman', title: 'E Friedman' },
  { quantity: 'activation_energy', method: 'vyazovkin', title: 'E Vyazovkin' },
  { quantity: 'activation_energy', method: 'jmak', title: 'E JMAK' },
  { quantity: 'avrami_exponent', method: 'jmak', title: 'n JMAK' },
] as const;

export type Headline = (typeof HEADLINES)[number];

/** True for the row with empty variant, empty conversion and temperature and the Monte Carlo interval. */
export function isHeadline(row: ResultRow): boolean {
  return (
    row.interval === 'monte_carlo' &&
    (row.variant ?? '') === '' &&
    row.conversion == null &&
    row.temperature_K == null &&
    HEADLINES.some((h) => h.quantity === row.quantity && h.method === row.method)
  );
}

export function findHeadline(
  rows: readonly ResultRow[],
  sample: string,
  headline: Headline,
  event = 1,
): ResultRow | undefined {
  return rows.find(
    (row) =>
      isHeadline(row) &&
      row.sample === sample &&
      row.event === event &&
      row.quantity === headline.quantity &&
      row.method === headline.method,
  );
}

/** `310.2 [307–313]` */
export function withInterval(row: ResultRow): string {
  const value = shortNumber(row.value as number);
  if (row.lower95 == null || row.upper95 == null) return value;
  return `${value} [${shortNumber(row.lower95 as number, 3)}–${shortNumber(row.upper95 as number, 3)}]`;
}

/** One line a sample and event: E by each headline method in kJ/mol and n, Kissinger's with its 95 % interval. */
export function headlineTable(
  samples: readonly { sample: string; state: string }[],
  rows: readonly ResultRow[],
): string {
  const lines = samples.flatMap(({ sample, state }) => {
    const events = [...new Set(rows.filter((r) => r.sample === sample).map((r) => r.event as number))];
    if (events.length === 0) return [[sample, '', state, '', ...HEADLINES.slice(1).map(() => '')]];
    return events.map((event) => {
      const found = HEADLINES.map((headline) => findHeadline(rows, sample, headline, event));
      const any = found.find((row) => row !== undefined);
      const span =
        any && `${shortNumber(any.rate_min_K_per_s as number, 2)}–${shortNumber(any.rate_max_K_per_s as number, 2)}`;
      const cells = found.map((row, i) =>
        row ? (i === 0 ? withInterval(row) : shortNumber(row.value as number)) : '–',
      );
      return [sample, String(any?.scan_count ?? ''), span ?? '', ...cells];
    });
  });
  const titles = HEADLINES.map((h, i) => ({ title: i === 0 ? `${h.title} [95 %]` : h.title, right: true }));
  return textTable(
    [{ title: 'sample', shrinks: true }, { title: 'scans', right: true }, { title: 'K/s' }, ...titles],
    lines,
  );
}
