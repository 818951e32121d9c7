import type { ExothermDirection, InstrumentKind } from '../../schema/wire/states.ts';
import type { TextDialect } from './scan-text.ts';

/** Three invented instruments, each with a lag, an offset, a sign and a text dialect of its own. */
export interface DemoInstrument {
  instrument: string;
  kind: InstrumentKind;
  offsetK: number;
  offsetErrorK: number;
  shiftS: number;
  responseS: number;
  lagErrorS: number;
  exotherm: ExothermDirection;
  /** True when the files say the direction in words; the sheet is then silent. */
  directionInFile: boolean;
  rateMinKPerS: number;
  rateMaxKPerS: number;
  noiseFraction: number;
  /** Scatter of temperature from one mount to the next, one standard deviation, K */
  mountScatterK: number;
  /** Rows are written this far apart in temperature, K, but never closer than `shortestStepS` */
  stepK: number;
  shortestStepS: number;
  /** Typical sample mass, kg; a chip's is not known to its user */
  massKg: number;
  dialect: Omit<TextDialect, 'preamble'>;
  preamble: readonly string[];
}

const SYNTHETIC = 'SYNTHETIC data from the simulator of ratespan, not a measurement';

export const FURNACE_EAST: DemoInstrument = {
  instrument: 'furnace-east',
  kind: 'furnace',
  offsetK: 0.4,
  offsetErrorK: 0.1,
  shiftS: 1,
  responseS: 1,
  lagErrorS: 0.1,
  exotherm: 'up',
  directionInFile: true,
  rateMinKPerS: 0.01,
  rateMaxKPerS: 1.7,
  noiseFraction: 0.004,
  mountScatterK: 0.06,
  stepK: 0.06,
  shortestStepS: 0.05,
  massKg: 9e-6,
  dialect: {
    encoding: 'latin-1',
    lineEnd: '\r\n',
    delimiter: ';',
    decimal: ',',
    timeUnit: 'min',
    temperatureUnit: '°C',
    heatFlowUnit: 'mW',
    unitPlace: 'row',
    headers: { time: 'Time', temperature: 'Temperature', heatFlow: 'Heat flow' },
  },
  preamble: [SYNTHETIC, 'Instrument;furnace-east', 'Signal direction;exo up'],
};

export const FURNACE_WEST: DemoInstrument = {
  instrument: 'furnace-west',
  kind: 'furnace',
  offsetK: -0.3,
  offsetErrorK: 0.1,
  shiftS: 1.75,
  responseS: 1.75,
  lagErrorS: 0.15,
  exotherm: 'down',
  directionInFile: false,
  rateMinKPerS: 0.01,
  rateMaxKPerS: 1.7,
  noiseFraction: 0.003,
  mountScatterK: 0.06,
  stepK: 0.06,
  shortestStepS: 0.05,
  massKg: 6e-6,
  dialect: {
    encoding: 'utf-8-bom',
    lineEnd: '\n',
    delimiter: ',',
    decimal: '.',
    timeUnit: 's',
    temperatureUnit: 'K',
    heatFlowUnit: 'W/g',
    unitPlace: 'brackets',
    headers: { time: 'time', temperature: 'temperature', heatFlow: 'heat flow' },
  },
  preamble: [`# ${SYNTHETIC}`, '# furnace-west'],
};

export const CHIP_NORTH: DemoInstrument = {
  instrument: 'chip-north',
  kind: 'chip',
  offsetK: 0.8,
  offsetErrorK: 0.3,
  shiftS: 50e-6,
  responseS: 50e-6,
  lagErrorS: 10e-6,
  exotherm: 'down',
  directionInFile: true,
  rateMinKPerS: 10,
  rateMaxKPerS: 50_000,
  noiseFraction: 0.006,
  mountScatterK: 0.25,
  stepK: 0.08,
  shortestStepS: 4e-6,
  massKg: 25e-12,
  dialect: {
    encoding: 'utf-16le',
    lineEnd: '\r\n',
    delimiter: '\t',
    decimal: '.',
    timeUnit: 'ms',
    temperatureUnit: '°C',
    heatFlowUnit: 'µW',
    unitPlace: 'parentheses',
    headers: { time: 'Time', temperature: 'Sample temperature', heatFlow: 'Heat flow, endo up' },
  },
  preamble: [SYNTHETIC, 'chip-north membrane calorimeter (invented)'],
};

export const DEMO_INSTRUMENTS: readonly DemoInstrument[] = [FURNACE_EAST, FURNACE_WEST, CHIP_NORTH];
