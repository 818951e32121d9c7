import { createRandom } from '../../jobs/numeric/random.ts';
import { linearRamp, type SimulatedInstrument, simulateScan, writeScanText } from '../../jobs/simulate/index.ts';

/** Synthetic: one Arrhenius sample on one furnace, five rates. True E = 200 kJ/mol, n = 3. */
export const TRUE_ENERGY_KJ_PER_MOL = 200;
export const RATES_K_PER_MIN = [2, 5, 10, 20, 40];

const material = {
  law: { kind: 'arrhenius', energyJPerMol: TRUE_ENERGY_KJ_PER_MOL * 1000, lnPrefactor: 35.6 },
  avramiExponent: 3,
  enthalpyJPerKg: 40_000,
} as const;
const MASS_KG = 10e-6;

function scanFile(rateKPerMin: number): Uint8Array {
  const rateKPerS = rateKPerMin / 60;
  const instrument: SimulatedInstrument = {
    offsetK: 0,
    shiftS: 0,
    responseS: 0,
    exotherm: 'up',
    noiseFraction: 0.002,
    drift: { linear: 0, quadratic: 0 },
    stepS: 0.25 / rateKPerS,
  };
  const random = createRandom(`${rateKPerMin}`.padStart(64, '0'));
  const scan = simulateScan(material, MASS_KG, instrument, linearRamp(500, 700, rateKPerS), random);
  return writeScanText(
    { timeS: scan.timeS, temperatureK: scan.temperatureK, heatFlowW: scan.heatFlowW, massKg: MASS_KG },
    {
      encoding: 'utf-8',
      lineEnd: '\n',
      delimiter: ',',
      decimal: '.',
      timeUnit: 's',
      temperatureUnit: '°C',
      heatFlowUnit: 'mW',
      unitPlace: 'brackets',
      headers: { time: 'time', temperature: 'temperature', heatFlow: 'heat flow' },
      preamble: ['# synthetic'],
    },
  );
}

/** Path → bytes, sheets first. */
export function smallCampaign(rates = RATES_K_PER_MIN): Map<string, Uint8Array> {
  const encode = (lines: string[]) => new TextEncoder().encode(`${lines.join('\n')}\n`);
  const files = new Map<string, Uint8Array>();
  files.set(
    'scans.csv',
    encode([
      'file,sample,instrument,rate [K/min],mass [mg],exotherm',
      ...rates.map((r) => `glass/oven/at-${r}.csv,glass,oven,${r},10,up`),
    ]),
  );
  files.set('instruments.csv', encode(['instrument,kind,lag [s],offset [K],response time [s]', 'oven,furnace,0,0,0']));
  for (const rate of rates) files.set(`glass/oven/at-${rate}.csv`, scanFile(rate));
  return files;
}
