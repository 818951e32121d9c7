import { type Dialect, PLAIN_DIALECT } from './dialects.ts';
import { encodeText } from './encode-text.ts';

export interface SheetScan {
  file: string;
  sample: string;
  instrument: string;
  role?: 'sample' | 'standard' | 'blank';
  rateKPerS?: number;
  massKg?: number;
  exotherm?: 'up' | 'down';
  replicate?: string;
  segment?: number;
  reference?: string;
  note?: string;
}

export interface SheetInstrument {
  instrument: string;
  kind?: 'furnace' | 'chip';
  lagS?: number;
  lagErrorS?: number;
  offsetK?: number;
  offsetErrorK?: number;
  responseS?: number;
  /** V/W */
  sensitivityVPerW?: number;
}

export interface SheetSample {
  sample: string;
  meltingK?: number;
  crystallizationEnthalpyJPerKg?: number;
  glassTransitionK?: number;
  heatCapacityJPerKgK?: number;
  cooledAtHeatingRate?: boolean;
}

type Cell = string | number | undefined;
type Form = Pick<Dialect, 'delimiter' | 'decimal' | 'encoding' | 'newline'>;

const celsius = (kelvin: number | undefined): Cell => kelvin && kelvin - 273.15;
const scaled = (value: number | undefined, factor: number): Cell => (value === undefined ? undefined : value * factor);

/** A sheet as bytes; numbers with twelve digits, so that 1/60 K/s comes back as 1 K/min. */
function writeSheet(header: string[], rows: Cell[][], form: Form): Uint8Array {
  if (form.delimiter === 'spaces') throw new RangeError('a sheet has empty cells: runs of spaces cannot hold it');
  const cell = (value: Cell): string => {
    if (value === undefined) return '';
    if (typeof value === 'string') return value.includes(form.delimiter) ? `"${value}"` : value;
    const text = String(Number(value.toPrecision(12)));
    return form.decimal === ',' ? text.replace('.', ',') : text;
  };
  const lines = [header, ...rows].map((row) => row.map(cell).join(form.delimiter));
  return encodeText(lines.join(form.newline) + form.newline, form.encoding);
}

export const writeScansSheet = (scans: readonly SheetScan[], form: Form = PLAIN_DIALECT): Uint8Array =>
  writeSheet(
    [
      'file',
      'sample',
      'instrument',
      'role',
      'rate [K/min]',
      'mass [mg]',
      'exotherm',
      'replicate',
      'segment',
      'reference',
      'note',
    ],
    scans.map((s) => [
      s.file,
      s.sample,
      s.instrument,
      s.role,
      scaled(s.rateKPerS, 60),
      scaled(s.massKg, 1e6),
      s.exotherm,
      s.replicate,
      s.segment,
      s.reference,
      s.note,
    ]),
    form,
  );

export const writeInstrumentsSheet = (
  instruments: readonly SheetInstrument[],
  form: Form = PLAIN_DIALECT,
): Uint8Array =>
  writeSheet(
    [
      'instrument',
      'kind',
      'lag [s]',
      'lag error [s]',
      'offset [K]',
      'offset error [K]',
      'response time [s]',
      'sensitivity [µV/mW]',
    ],
    instruments.map((i) => [
      i.instrument,
      i.kind,
      i.lagS,
      i.lagErrorS,
      i.offsetK,
      i.offsetErrorK,
      i.responseS,
      scaled(i.sensitivityVPerW, 1e3),
    ]),
    form,
  );

export const writeSamplesSheet = (samples: readonly SheetSample[], form: Form = PLAIN_DIALECT): Uint8Array =>
  writeSheet(
    [
      'sample',
      'melting temperature [°C]',
      'enthalpy of crystallization [J/g]',
      'glass transition [°C]',
      'heat capacity [J/(g K)]',
      'cooled at heating rate',
    ],
    samples.map((s) => [
      s.sample,
      celsius(s.meltingK),
      scaled(s.crystallizationEnthalpyJPerKg, 1e-3),
      celsius(s.glassTransitionK),
      scaled(s.heatCapacityJPerKgK, 1e-3),
      s.cooledAtHeatingRate === undefined ? undefined : s.cooledAtHeatingRate ? 'yes' : 'no',
    ]),
    form,
  );
