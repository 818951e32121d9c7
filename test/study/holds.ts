import { fitArrhenius } from '../../jobs/kinetics/avrami/hold-series.ts';
import { fitHold } from '../../jobs/kinetics/avrami/isothermal.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import {
  arrheniusLawWithPeak,
  createProgramme,
  type RateLaw,
  type ScanModel,
  seededRandom,
} from './generator/index.ts';
import { reduceModel } from './reduce-model.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** Half times of the five holds, s. */
const HALF_TIMES = [60, 120, 240, 480, 960];
/** Ramp to the hold, K/s. */
const RAMP = 5;

/** JMAK that begins when X = ∫K dt has reached `delay`: an induction time of delay/K on a hold. */
function delayedJmak(n: number, delay: number): RateLaw {
  const past = (x: number) => Math.max(0, x - delay);
  return {
    start: 0,
    drive: () => 1,
    conversion: (x) => -Math.expm1(-(past(x) ** n)),
    rateFactor: (x) => (past(x) === 0 ? 0 : n * past(x) ** (n - 1) * Math.exp(-(past(x) ** n))),
    logRateSlope: (x) => (n - 1) / past(x) - n * past(x) ** (n - 1),
  };
}

export interface HoldsResult {
  exponent: number;
  /** relative errors of n, a hold each */
  exponentErrors: number[];
  energyError: number;
  /** holds without a curve */
  lost: number;
}

/** Five holds of one sample with an induction time of 0 to 0.4 half times; n from each, E from ln K against 1/T. */
export function reduceHolds(seed: string, index: number, noise = 0.003): HoldsResult {
  const random = seededRandom(`holds/${seed}/${index}`);
  const energy = 1e3 * random.between(180, 350);
  const n = random.between(2, 4);
  const law = arrheniusLawWithPeak(energy, random.between(600, 720), 1 / 3);
  const delay = random.between(0, 0.4);
  const fits = HALF_TIMES.flatMap((halfS) => {
    // K t½ = (ln 2)^(1/n)
    const rate = Math.LN2 ** (1 / n) / halfS;
    let [low, high] = [300, 1200];
    for (let i = 0; i < 60; i++) {
      const middle = (low + high) / 2;
      if (law.lnK(middle) < Math.log(rate)) low = middle;
      else high = middle;
    }
    const programme = createProgramme(low - 120, [
      { kind: 'ramp', rateKPerS: RAMP, toK: low },
      { kind: 'hold', durationS: (6 + delay) * halfS },
    ]);
    const model: ScanModel = {
      sample: {
        events: [{ temperature: law, rate: delayedJmak(n, delay), enthalpyJPerKg: 45e3 }],
        heatCapacity: { jPerKgK: 800, slopeJPerKgK2: 0, referenceK: low },
      },
      instrument: { offsetK: 0, shiftS: 1, responseS: 0.5 },
      programme,
      massKg: 8e-6,
    };
    const recording = { noise, drift: 0.01, driftOrder: 2 as const };
    const outcome = reduceModel(model, { rows: 3000, recording }, random.fork(`hold ${halfS}`));
    const event = outcome.ok ? outcome.reduced.events[0] : undefined;
    if (!event?.curve || event.holdK === undefined || event.holdReachedS === undefined) return [];
    return [{ temperatureK: event.holdK, fit: fitHold(event.curve.timeS, CONVERSION_GRID, event.holdReachedS) }];
  });
  return {
    exponent: n,
    exponentErrors: fits.map(({ fit }) => fit.exponent / n - 1),
    energyError: fits.length > 2 ? fitArrhenius(fits).energy / energy - 1 : Number.NaN,
    lost: HALF_TIMES.length - fits.length,
  };
}

export function holdsStudy({ count = 20, seed }: StudyOptions): string {
  const results = Array.from({ length: count }, (_, index) => reduceHolds(seed, index));
  const single = results.flatMap((r) => r.exponentErrors.map(Math.abs));
  const means = results.map((r) => Math.abs(r.exponentErrors.reduce((a, b) => a + b, 0) / r.exponentErrors.length));
  const energies = results.map((r) => Math.abs(r.energyError)).filter(Number.isFinite);
  const rows = [
    ['n of one hold', single],
    ['n, mean of five holds', means],
    ['E', energies],
  ].map(([name, sizes]) => {
    const values = sizes as number[];
    const within = values.filter((v) => v <= 0.04).length;
    return [
      name as string,
      percent(quantile(values, 0.5)),
      percent(quantile(values, 0.95)),
      `${within} of ${values.length}`,
    ];
  });
  const lost = results.reduce((sum, r) => sum + r.lost, 0);
  return [
    `Five holds with half times ${HALF_TIMES.join(', ')} s and an induction time of 0 to 0.4 of 1/K, ${count} samples, n 2 to 4; ${lost} holds without a curve.`,
    markdownTable(['quantity', 'median |error|', '95th percentile', 'within 4 %'], rows),
  ].join('\n\n');
}
