/** The three sheets of a campaign as typed rows in SI. */
import { type Flag, quote } from '../../schema/wire/flags.ts';
import type { InstrumentSheetRow, SampleSheetRow, ScanSheetRow } from '../../schema/wire/scan.ts';
import { EXOTHERM_DIRECTIONS, INSTRUMENT_KINDS, ROLES, type Role } from '../../schema/wire/states.ts';
import { unpackedPath } from './paths.ts';
import {
  above,
  any,
  counted,
  firstOfEach,
  fraction,
  name,
  notBelow,
  path,
  rate,
  text,
  withLine,
} from './sheet-columns.ts';
import { readSheet, type SheetColumn } from './sheet-table.ts';

export interface SheetRows<Row> {
  rows: Row[];
  flags: Flag[];
}

const SCAN_COLUMNS: readonly SheetColumn[] = [
  { key: 'file', name: 'file', kind: path, required: true },
  { key: 'sample', name: 'sample', kind: name, required: true },
  { key: 'instrument', name: 'instrument', kind: name, required: true },
  { key: 'role', name: 'role', kind: { kind: 'choice', values: ROLES } },
  { key: 'rateKPerS', name: 'rate', kind: rate },
  { key: 'massKg', name: 'mass', kind: above('mass', 0) },
  { key: 'exotherm', name: 'exotherm', kind: { kind: 'choice', values: EXOTHERM_DIRECTIONS } },
  { key: 'replicate', name: 'replicate', kind: text },
  { key: 'segment', name: 'segment', kind: counted },
  { key: 'reference', name: 'reference', kind: path },
  { key: 'note', name: 'note', kind: text },
];

const INSTRUMENT_COLUMNS: readonly SheetColumn[] = [
  { key: 'instrument', name: 'instrument', kind: name, required: true },
  { key: 'kind', name: 'kind', kind: { kind: 'choice', values: INSTRUMENT_KINDS } },
  { key: 'lagS', name: 'lag', kind: any('time') },
  { key: 'lagErrorS', name: 'lag error', kind: notBelow('time') },
  { key: 'offsetK', name: 'offset', kind: any('temperature difference') },
  { key: 'offsetErrorK', name: 'offset error', kind: notBelow('temperature difference') },
  { key: 'rateMinKPerS', name: 'rate min', kind: above('rate', 0) },
  { key: 'rateMaxKPerS', name: 'rate max', kind: above('rate', 0) },
  { key: 'responseS', name: 'response time', kind: notBelow('time') },
  { key: 'sensitivityVPerW', name: 'sensitivity', kind: above('sensitivity', 0) },
];

const SAMPLE_COLUMNS: readonly SheetColumn[] = [
  { key: 'sample', name: 'sample', kind: name, required: true },
  { key: 'meltingK', name: 'melting temperature', kind: above('temperature', 0) },
  { key: 'meltingEnthalpyJPerKg', name: 'enthalpy of melting', kind: above('enthalpy', 0) },
  { key: 'crystallizationEnthalpyJPerKg', name: 'enthalpy of crystallization', kind: above('enthalpy', 0) },
  { key: 'glassTransitionK', name: 'glass transition', kind: above('temperature', 0) },
  { key: 'fragility', name: 'fragility', kind: above('number', 0) },
  { key: 'molarMassKgPerMol', name: 'molar mass', kind: above('molar mass', 0) },
  { key: 'growthRateMPerS', name: 'growth rate', kind: above('velocity', 0) },
  { key: 'growthTemperatureK', name: 'growth temperature', kind: above('temperature', 0) },
  { key: 'series', name: 'series', kind: name },
  { key: 'solventFraction', name: 'solvent fraction', kind: fraction },
  { key: 'heatCapacityJPerKgK', name: 'heat capacity', kind: above('heat capacity', 0) },
  { key: 'cooledAtHeatingRate', name: 'cooled at heating rate', kind: { kind: 'choice', values: ['yes', 'no'] } },
];

/** `scans.csv`. A file named with `.gz` is the file without it; two rows may name one file when their segments differ. */
export function readScansSheet(bytes: Uint8Array, file: string): SheetRows<ScanSheetRow> {
  const { rows, flags } = readSheet(bytes, file, SCAN_COLUMNS);
  const scans = rows.map(({ line, cells }) => {
    const row = { ...cells, line } as unknown as ScanSheetRow;
    row.file = unpackedPath(row.file);
    if (row.reference !== undefined) row.reference = unpackedPath(row.reference);
    row.role ??= 'sample' satisfies Role;
    return row;
  });
  const keyOf = (row: ScanSheetRow) =>
    row.segment === undefined ? quote(row.file) : `${quote(row.file)} segment ${row.segment}`;
  return { rows: firstOfEach(scans, keyOf, file, flags), flags };
}

/** `instruments.csv` */
export function readInstrumentsSheet(bytes: Uint8Array, file: string): SheetRows<InstrumentSheetRow> {
  const { rows, flags } = readSheet(bytes, file, INSTRUMENT_COLUMNS);
  const instruments = rows.map((row) => withLine<InstrumentSheetRow>(row));
  return { rows: firstOfEach(instruments, (row) => quote(row.instrument), file, flags), flags };
}

/** `samples.csv` */
export function readSamplesSheet(bytes: Uint8Array, file: string): SheetRows<SampleSheetRow> {
  const { rows, flags } = readSheet(bytes, file, SAMPLE_COLUMNS);
  const samples = rows.map(({ line, cells }) => {
    const { cooledAtHeatingRate, ...others } = cells;
    const row = withLine<SampleSheetRow>({ line, cells: others });
    if (cooledAtHeatingRate !== undefined) row.cooledAtHeatingRate = cooledAtHeatingRate === 'yes';
    return row;
  });
  return { rows: firstOfEach(samples, (row) => quote(row.sample), file, flags), flags };
}
