import { FORECAST_TABLES } from './forecasts.ts';

/** Columns of verdicts.csv. */
export const VERDICT_COLUMNS = [
  'sample',
  'event',
  'verdict',
  'bend',
  'bend_lower99',
  'bend_upper99',
  'p_value',
  'delta_aicc',
  'energy_low_rate_kJ_per_mol',
  'energy_high_rate_kJ_per_mol',
  'instruments',
  'rate_min_K_per_s',
  'rate_max_K_per_s',
  'decides_next',
] as const;

/**
 * Columns of the result files, in order. The CSV files of `run`, the `?format=csv`
 * answers and the JSON keys of the API all come from this one place. Add columns at the end; never rename.
 */
export const RESULT_TABLES = {
  parameters: [
    'sample',
    'event',
    'quantity',
    'method',
    'conversion',
    'temperature_K',
    'value',
    'unit',
    'lower95',
    'upper95',
    'scan_count',
    'rate_min_K_per_s',
    'rate_max_K_per_s',
    'flags',
    'interval',
    'variant',
  ],
  scans: [
    'file',
    'sha256',
    'sample',
    'instrument',
    'role',
    'event',
    'status',
    'reason',
    'rate_nominal_K_per_s',
    'rate_K_per_s',
    'mass_mg',
    'glass_transition_K',
    'onset_K',
    'peak_K',
    'end_K',
    'width_K',
    'enthalpy_J_per_g',
    'flags',
    'segment',
    'replicate',
    'centroid_K',
  ],
  conversion: [
    'file',
    'segment',
    'sample',
    'instrument',
    'event',
    'conversion',
    'time_s',
    'temperature_K',
    'rate_per_s',
  ],
  verdicts: VERDICT_COLUMNS,
  instruments: [
    'instrument',
    'kind',
    'offset_K',
    'offset_se_K',
    'lag_s',
    'lag_se_s',
    'heat_factor',
    'heat_factor_se',
    'standards',
    'source',
    'offset_slope',
    'response_time_s',
  ],
  coverage: ['sample', 'decade_low_K_per_s', 'decade_high_K_per_s', 'instrument', 'scan_count', 'rates'],
  gaps: ['sample', 'code', 'detail', 'action'],
  ...FORECAST_TABLES,
  flags: ['severity', 'code', 'sample', 'instrument', 'file', 'event', 'detail', 'action'],
} as const satisfies Record<string, readonly string[]>;

export type ResultTable = keyof typeof RESULT_TABLES;

export type Cell = string | number | null | undefined | readonly (string | number)[];

/**
 * One CSV cell (RFC 4180): lists joined by `;`, missing empty, numbers by the shortest text that reads back the same.
 * A number that is not finite is a defect of the caller: RangeError.
 */
export function csvCell(value: Cell): string {
  if (value === null || value === undefined) return '';
  if (typeof value === 'number') {
    if (!Number.isFinite(value)) throw new RangeError(`a result cell must be a finite number or empty; got ${value}`);
    return String(value);
  }
  const text = typeof value === 'string' ? value : value.map((v) => csvCell(v)).join(';');
  return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

/** Header line of a result table, ended by LF. */
export function csvHeader(table: ResultTable): string {
  return `${RESULT_TABLES[table].join(',')}\n`;
}

/** One row of a result table, ended by LF. */
export function csvRow(table: ResultTable, row: Record<string, unknown>): string {
  return `${RESULT_TABLES[table].map((column) => csvCell(row[column] as Cell)).join(',')}\n`;
}

/** Header line and rows of a result table, lines ended by LF. */
export function csvTable(table: ResultTable, rows: Iterable<Record<string, unknown>>): string {
  let out = csvHeader(table);
  for (const row of rows) out += csvRow(table, row);
  return out;
}
