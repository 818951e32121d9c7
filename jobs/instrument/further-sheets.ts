/** Sheets without scans: tables of temperatures and viscosities, goals, programmes, in SI. */
import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { GoalRow, PeakSheetRow, ProgrammeTable, ViscositySheetRow } from '../../schema/wire/forecasts.ts';
import { above, any, counted, fraction, name, notBelow, rate, text, withLine } from './sheet-columns.ts';
import { readSheet, type SheetColumn } from './sheet-table.ts';
import type { SheetRows } from './sheets.ts';

const PEAK_COLUMNS: readonly SheetColumn[] = [
  { key: 'sample', name: 'sample', kind: name, required: true },
  { key: 'instrument', name: 'instrument', kind: name, required: true },
  { key: 'event', name: 'event', kind: counted },
  { key: 'rateKPerS', name: 'rate', kind: rate, required: true },
  { key: 'peakK', name: 'peak', kind: above('temperature', 0) },
  { key: 'onsetK', name: 'onset', kind: above('temperature', 0) },
  { key: 'glassTransitionK', name: 'glass transition', kind: above('temperature', 0) },
  { key: 'meltingK', name: 'melting', kind: above('temperature', 0) },
  { key: 'replicate', name: 'replicate', kind: text },
  { key: 'peakErrorK', name: 'peak error', kind: notBelow('temperature difference') },
];

const VISCOSITY_COLUMNS: readonly SheetColumn[] = [
  { key: 'sample', name: 'sample', kind: name, required: true },
  { key: 'temperatureK', name: 'temperature', kind: above('temperature', 0), required: true },
  { key: 'log10PaS', name: 'log10 viscosity', kind: any('log10 viscosity'), required: true },
];

const GOAL_COLUMNS: readonly SheetColumn[] = [
  { key: 'sample', name: 'sample', kind: name, required: true },
  { key: 'conversion', name: 'conversion', kind: fraction },
  { key: 'temperatureK', name: 'temperature', kind: above('temperature', 0) },
  { key: 'timeS', name: 'time', kind: above('time', 0) },
];

const PROGRAMME_COLUMNS: readonly SheetColumn[] = [
  { key: 'timeS', name: 'time', kind: any('time'), required: true },
  { key: 'temperatureK', name: 'temperature', kind: above('temperature', 0), required: true },
];

/** Error of a peak temperature where the table states none, K. */
const PEAK_ERROR_K = 0.5;

/** `peaks.csv`. A row without peak, onset and glass transition is flagged and left out; melting temperatures are flagged once, since nothing uses them; a missing error is 0.5 K, flagged once a sheet. */
export function readPeaksSheet(bytes: Uint8Array, file: string): SheetRows<PeakSheetRow> {
  const { rows, flags } = readSheet(bytes, file, PEAK_COLUMNS);
  const peaks: PeakSheetRow[] = [];
  let assumed = 0;
  const molten: number[] = [];
  for (const row of rows.map((r) => withLine<PeakSheetRow>(r))) {
    const { peakK, onsetK, glassTransitionK, meltingK, line } = row;
    if (meltingK !== undefined) molten.push(line);
    if ([peakK, onsetK, glassTransitionK].every((T) => T === undefined)) {
      const has = meltingK === undefined ? 'no temperature' : 'no temperature but a melting one, which is not used';
      flags.push(damaged(file, `line ${line} has ${has}`, 'Fill in its peak, onset or glass transition.'));
      continue;
    }
    if (row.peakErrorK === undefined && peakK !== undefined) assumed++;
    peaks.push({ ...row, peakErrorK: row.peakErrorK ?? PEAK_ERROR_K });
  }
  if (molten.length > 0)
    flags.push(
      flag(
        'sheet-column-unused',
        `The melting temperatures of ${molten.length} rows, from line ${molten[0]} on, are kept beside the rows and used nowhere: stability and forecasts take the sample’s.`,
        'Give the melting temperature of the sample in samples.csv.',
        { file },
      ),
    );
  if (assumed > 0)
    flags.push(
      flag(
        'peak-error-assumed',
        `${assumed} of ${peaks.length} rows state no peak error; ${PEAK_ERROR_K} K is taken for each.`,
        'Give the column peak error [K], for instance the spread of replicates.',
        { file },
      ),
    );
  return { rows: peaks, flags };
}

/** `viscosity.csv`; log10 of Pa s, or of poise with [P] in the header. */
export function readViscositySheet(bytes: Uint8Array, file: string): SheetRows<ViscositySheetRow> {
  const { rows, flags } = readSheet(bytes, file, VISCOSITY_COLUMNS);
  return { rows: rows.map((row) => withLine<ViscositySheetRow>(row)), flags };
}

/** `goal.csv`: what a row leaves empty is what it asks for, so a conversion alone or two of conversion, temperature and time must be there. */
export function readGoalSheet(bytes: Uint8Array, file: string): SheetRows<GoalRow> {
  const { rows, flags } = readSheet(bytes, file, GOAL_COLUMNS);
  const goals: GoalRow[] = [];
  for (const row of rows.map((r) => withLine<GoalRow & { line: number }>(r))) {
    const { conversion, temperatureK, timeS, line } = row;
    const given = [conversion, temperatureK, timeS].filter((v) => v !== undefined).length;
    if (given < 2 && conversion === undefined)
      flags.push(
        damaged(
          file,
          `line ${line} asks nothing: of conversion, temperature and time it has ${given}`,
          'Fill in two or three of them, or the conversion alone for the campaign’s programmes.',
        ),
      );
    else if (conversion !== undefined && !(conversion > 0 && conversion < 1))
      flags.push(
        damaged(file, `line ${line} has a conversion of ${conversion}, not in (0, 1)`, 'Correct the conversion.'),
      );
    else goals.push(row);
  }
  return { rows: goals, flags };
}

/**
 * A temperature programme, `programs/*.csv`, named by its path. Rows that do not come after the one before are flagged and left out.
 * @returns no programme where fewer than two rows are left
 */
export function readProgram(bytes: Uint8Array, file: string): { programme?: ProgrammeTable; flags: Flag[] } {
  const { rows, flags } = readSheet(bytes, file, PROGRAMME_COLUMNS);
  const kept: { timeS: number; temperatureK: number }[] = [];
  for (const row of rows.map((r) => withLine<{ timeS: number; temperatureK: number; line: number }>(r))) {
    const before = kept.at(-1);
    if (before !== undefined && !(row.timeS > before.timeS))
      flags.push(
        damaged(
          file,
          `line ${row.line}: ${row.timeS} s does not come after ${before.timeS} s`,
          'Times must rise; write a jump of temperature as two rows a moment apart.',
        ),
      );
    else kept.push(row);
  }
  if (kept.length < 2) {
    if (flags.every((f) => f.severity !== 'stop'))
      flags.push(
        damaged(file, `the programme has ${kept.length} rows`, 'Give at least two rows of time and temperature.'),
      );
    return { flags };
  }
  const programme: ProgrammeTable = {
    name: file,
    timeS: Float64Array.from(kept, (r) => r.timeS),
    temperatureK: Float64Array.from(kept, (r) => r.temperatureK),
  };
  return { programme, flags };
}

const damaged = (file: string, detail: string, action: string): Flag => flag('sheet-damaged', detail, action, { file });
