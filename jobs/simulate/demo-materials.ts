import { celsiusFromKelvin, kelvinPerSecond } from '../../schema/wire/units.ts';
import { arrheniusLawAt, bentLawBetween } from './rate-law.ts';
import type { SimulatedMaterial } from './scan.ts';

/** Three invented materials. No real substance has these numbers; they only lie where such materials usually lie. */
export interface DemoMaterial extends SimulatedMaterial {
  sample: string;
  description: string;
  /** For samples.csv, °C; not every sample has one */
  meltingC?: number;
  /** How far the scans go beyond the expected peak, K */
  abovePeakK: number;
}

const TEN_K_PER_MIN = kelvinPerSecond(10);

export const DEMO_FILM: DemoMaterial = {
  sample: 'synthetic-film',
  description: 'a fragile alloy film (invented)',
  law: bentLawBetween(
    { temperatureK: 420, energyJPerMol: 260_000 },
    { temperatureK: 545, energyJPerMol: 150_000 },
    kelvinPerSecond(2),
  ),
  avramiExponent: 3,
  enthalpyJPerKg: 60_000,
  glassTransition: {
    temperatureK: 372,
    rateKPerS: TEN_K_PER_MIN,
    risePerDecadeK: 4.2,
    widthK: 1.5,
    stepJPerKgK: 180,
  },
  abovePeakK: 55,
};

export const DEMO_RIBBON: DemoMaterial = {
  sample: 'synthetic-ribbon',
  description: 'a metallic ribbon (invented)',
  law: arrheniusLawAt(310_000, 722, TEN_K_PER_MIN),
  avramiExponent: 3,
  enthalpyJPerKg: 75_000,
  meltingC: 1040,
  abovePeakK: 60,
};

export const DEMO_EXCIPIENT: DemoMaterial = {
  sample: 'synthetic-excipient',
  description: 'a sugar-bound excipient (invented)',
  law: arrheniusLawAt(190_000, 395, TEN_K_PER_MIN),
  avramiExponent: 2.5,
  enthalpyJPerKg: 95_000,
  meltingC: Number(celsiusFromKelvin(460).toFixed(2)),
  glassTransition: {
    temperatureK: 330,
    rateKPerS: TEN_K_PER_MIN,
    risePerDecadeK: 3.5,
    widthK: 1.4,
    stepJPerKgK: 480,
  },
  abovePeakK: 40,
};

export const DEMO_MATERIALS: readonly DemoMaterial[] = [DEMO_FILM, DEMO_RIBBON, DEMO_EXCIPIENT];
