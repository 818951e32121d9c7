import { mkdir, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { createRandom } from '../../jobs/numeric/random.ts';
import {
  arrheniusLawAt,
  linearRamp,
  simulateScan,
  type TextDialect,
  writeScanText,
} from '../../jobs/simulate/index.ts';
import { kelvinPerSecond } from '../../schema/wire/units.ts';

/** Two furnaces, their text and lag; both readers take these plain dialects. */
const INSTRUMENTS = [
  { name: 'furnace-a', lagS: 2, exotherm: 'up' as const, delimiter: ',' as const, decimal: '.' as const },
  { name: 'furnace-b', lagS: 3.5, exotherm: 'down' as const, delimiter: ';' as const, decimal: ',' as const },
];
const RATES_K_PER_MIN = [2, 5, 10, 20, 40];

/** Writes `samples` × 10 synthetic scans of `rows` rows with their sheets. */
export async function writePlainFolder(folder: string, samples: number, rows: number): Promise<void> {
  const random = createRandom('plain folder');
  const sheet = ['file,sample,instrument,role,rate [K/min],mass [mg],exotherm,note'];
  for (let s = 0; s < samples; s++) {
    const sample = `synthetic-${String(s + 1).padStart(4, '0')}`;
    const energy = 180e3 + 200e3 * random.uniform();
    const exponent = 2 + 1.5 * random.uniform();
    const peak = 500 + 300 * random.uniform();
    const law = arrheniusLawAt(energy, peak, kelvinPerSecond(10));
    await mkdir(join(folder, sample), { recursive: true });
    for (const rate of RATES_K_PER_MIN) {
      for (const instrument of INSTRUMENTS) {
        const beta = kelvinPerSecond(rate);
        const [from, to] = [0.74 * peak, 1.16 * peak];
        const scan = simulateScan(
          { law, avramiExponent: exponent, enthalpyJPerKg: 50e3 },
          10e-6,
          {
            offsetK: 0,
            shiftS: instrument.lagS,
            responseS: 0,
            exotherm: instrument.exotherm,
            noiseFraction: 0.003,
            drift: { linear: 0.03, quadratic: 0.03 },
            stepS: (to - from) / beta / (rows - 1),
          },
          linearRamp(from, to, beta),
          random,
        );
        const dialect: TextDialect = {
          encoding: 'utf-8',
          lineEnd: '\n',
          delimiter: instrument.delimiter,
          decimal: instrument.decimal,
          timeUnit: 's',
          temperatureUnit: '°C',
          heatFlowUnit: 'mW',
          unitPlace: 'brackets',
          headers: { time: 'time', temperature: 'temperature', heatFlow: 'heat flow' },
          preamble: ['synthetic'],
        };
        const file = `${sample}/${instrument.name}-${rate}.txt`;
        await writeFile(join(folder, file), writeScanText(scan, dialect));
        sheet.push(`${file},${sample},${instrument.name},sample,${rate},10,${instrument.exotherm},synthetic`);
      }
    }
  }
  await writeFile(join(folder, 'scans.csv'), `${sheet.join('\n')}\n`);
  const rows2 = INSTRUMENTS.map((i) => `${i.name},furnace,${i.lagS},0.1,0`);
  await writeFile(
    join(folder, 'instruments.csv'),
    `instrument,kind,lag [s],lag error [s],response time [s]\n${rows2.join('\n')}\n`,
  );
}
