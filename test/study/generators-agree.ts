import {
  type BentLaw,
  followProgramme,
  linearRamp,
  type ArrheniusLaw as SimulatedArrhenius,
  simulateConversion,
} from '../../jobs/simulate/index.ts';
import {
  arrheniusLaw,
  bentLaw,
  jmakLaw,
  rampProgramme,
  roughTemperature,
  samplingTimes,
  solveScan,
  type TemperatureLaw,
} from './generator/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable } from './table.ts';

interface Setting {
  name: string;
  /** The same law, said to either side in its own terms */
  simulated: SimulatedArrhenius | BentLaw;
  generated: TemperatureLaw;
  exponent: number;
  rateKPerS: number;
  shiftS: number;
}

export interface Agreement extends Setting {
  /** Largest |Δα| and |ΔT| of the sample over the scan */
  conversionDifference: number;
  temperatureDifferenceK: number;
}

function arrhenius(energyJPerMol: number, lnPrefactor: number): Pick<Setting, 'simulated' | 'generated' | 'name'> {
  return {
    name: `Arrhenius ${energyJPerMol / 1e3} kJ/mol`,
    simulated: { kind: 'arrhenius', energyJPerMol, lnPrefactor },
    generated: arrheniusLaw(energyJPerMol, lnPrefactor),
  };
}

function bent(energyJPerMol: number, bend: number): Pick<Setting, 'simulated' | 'generated' | 'name'> {
  const [centreK, halfSpanPerK, lnKCentre] = [640, 2.5e-4, -1.5];
  return {
    name: `bent, ${energyJPerMol / 1e3} kJ/mol × exp(±${bend / 2})`,
    simulated: {
      kind: 'bent',
      energyJPerMol,
      referenceK: centreK,
      halfSpanPerK,
      bend: bend / 2,
      lnRateAtReference: lnKCentre,
    },
    generated: bentLaw({ energyJPerMol, bend, centreK, halfSpanPerK, lnKCentre }),
  };
}

/** Ten settings: 0.03 … 30 000 K/s, n 1 … 4, straight and bent, with and without a trailing sample. */
const SETTINGS: Setting[] = [
  { ...arrhenius(120e3, 18), exponent: 1, rateKPerS: 0.03, shiftS: 0 },
  { ...arrhenius(200e3, 32.2), exponent: 3, rateKPerS: 10 / 60, shiftS: 1.5 },
  { ...arrhenius(300e3, 55), exponent: 1.5, rateKPerS: 40 / 60, shiftS: 0.8 },
  { ...arrhenius(450e3, 80), exponent: 4, rateKPerS: 5, shiftS: 0.2 },
  { ...arrhenius(200e3, 32.2), exponent: 2.5, rateKPerS: 30_000, shiftS: 0 },
  { ...arrhenius(250e3, 45), exponent: 2, rateKPerS: 1000, shiftS: 2e-4 },
  { ...bent(220e3, 1.6), exponent: 3, rateKPerS: 0.03, shiftS: 3 },
  { ...bent(220e3, 1.6), exponent: 1, rateKPerS: 1, shiftS: 0 },
  { ...bent(180e3, 0.4), exponent: 4, rateKPerS: 500, shiftS: 1e-3 },
  { ...bent(300e3, 0.8), exponent: 2, rateKPerS: 30_000, shiftS: 1e-5 },
];

/** Noise-free α(t) and sample temperature of both generators on a common clock. */
export function compareGenerators(settings: readonly Setting[] = SETTINGS): Agreement[] {
  return settings.map((setting) => {
    const { generated, simulated, exponent, rateKPerS, shiftS } = setting;
    const startK = roughTemperature(generated, rateKPerS, 1e-4);
    const endK = roughTemperature(generated, rateKPerS, 10 ** (1 / exponent)) + 5 * rateKPerS * shiftS + 20;
    const programme = rampProgramme(startK, endK, rateKPerS);
    const timeS = samplingTimes(0, programme.endS, 1001);
    const solution = solveScan(
      {
        sample: { events: [{ temperature: generated, rate: jmakLaw(exponent), enthalpyJPerKg: 1 }] },
        instrument: { offsetK: 0, shiftS, responseS: 0 },
        programme,
        massKg: 1,
      },
      timeS,
    );
    const follower = followProgramme(linearRamp(startK, endK, rateKPerS), shiftS);
    const { conversion } = simulateConversion(simulated, exponent, timeS, follower.sampleK);
    let conversionDifference = 0;
    let temperatureDifferenceK = 0;
    for (let k = 0; k < timeS.length; k++) {
      conversionDifference = Math.max(conversionDifference, Math.abs(conversion[k] - solution.conversion[0][k]));
      temperatureDifferenceK = Math.max(
        temperatureDifferenceK,
        Math.abs(follower.sampleK(timeS[k]) - solution.sampleK[k]),
      );
    }
    if (!(solution.conversion[0][timeS.length - 1] > 0.99))
      throw new Error(`${setting.name} at ${rateKPerS} K/s ends before its event does: nothing was compared`);
    return { ...setting, conversionDifference, temperatureDifferenceK };
  });
}

export function generatorsAgree({ count }: StudyOptions): string {
  const rows = compareGenerators(SETTINGS.slice(0, count));
  return markdownTable(
    ['law', 'n', 'rate K/s', 'shift s', 'max Δα', 'max ΔT K'],
    rows.map((row) => [
      row.name,
      row.exponent,
      row.rateKPerS.toPrecision(3),
      row.shiftS,
      row.conversionDifference.toExponential(1),
      row.temperatureDifferenceK.toExponential(1),
    ]),
  );
}
