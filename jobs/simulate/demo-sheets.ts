import { DEMO_INSTRUMENTS } from './demo-instruments.ts';
import { DEMO_MATERIALS } from './demo-materials.ts';

export interface DemoScanRow {
  file: string;
  sample: string;
  instrument: string;
  rateKPerS: number;
  massKg?: number;
  exotherm?: string;
  replicate: string;
}

const short = (value: number): string => String(Number(value.toPrecision(6)));

/** scans.csv of the demo: comma, decimal point. */
export function writeScansSheet(rows: readonly DemoScanRow[]): string {
  const head = 'file,sample,instrument,role,rate [K/s],mass [mg],exotherm,replicate,note';
  const lines = rows.map((row) =>
    [
      row.file,
      row.sample,
      row.instrument,
      'sample',
      short(row.rateKPerS),
      row.massKg === undefined ? '' : short(row.massKg * 1e6),
      row.exotherm ?? '',
      row.replicate,
      'synthetic',
    ].join(','),
  );
  return `${[head, ...lines].join('\n')}\n`;
}

/** instruments.csv in the dialect of another desk: semicolon, decimal comma. */
export function writeInstrumentsSheet(): string {
  const head =
    'instrument;kind;lag [s];lag error [s];offset [K];offset error [K];rate min [K/s];rate max [K/s];response time [s]';
  const lines = DEMO_INSTRUMENTS.map((i) =>
    [
      i.instrument,
      i.kind,
      ...[
        i.shiftS + i.responseS,
        i.lagErrorS,
        i.offsetK,
        i.offsetErrorK,
        i.rateMinKPerS,
        i.rateMaxKPerS,
        i.responseS,
      ].map((value) => short(value).replace('.', ',')),
    ].join(';'),
  );
  return `${[head, ...lines].join('\r\n')}\r\n`;
}

/** samples.csv: melting temperatures where the demo states one. */
export function writeSamplesSheet(): string {
  const lines = DEMO_MATERIALS.map((m) => `${m.sample},${m.meltingC ?? ''},synthetic`);
  return `${['sample,melting temperature [°C],series', ...lines].join('\n')}\n`;
}
