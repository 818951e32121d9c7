import { fitEnergyLine, KISSINGER } from '../../jobs/kinetics/peak-methods.ts';
import { matchEvents } from '../../jobs/reduction/index.ts';
import type { ReducedScan } from '../../schema/wire/reduced.ts';
import {
  arrheniusLawWithPeak,
  jmakLaw,
  programmeLimits,
  rampProgramme,
  type ScanModel,
  seededRandom,
} from './generator/index.ts';
import { reduceModel } from './reduce-model.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** K/s: 2 to 40 K/min. */
const RATES = [2 / 60, 5 / 60, 10 / 60, 20 / 60, 40 / 60];

export interface TwoEventsResult {
  apartK: number;
  energies: [number, number];
  /** relative errors of both Kissinger energies; NaN where fewer than three scans showed the event */
  errors: [number, number];
  /** area of each event, relative error, over all scans */
  areaErrors: number[];
  merged: number;
}

/** Two events 35 to 60 K apart at 10 K/min with different energies, five rates, noise 0.5 %. */
export function reduceTwoEvents(seed: string, index: number): TwoEventsResult {
  const random = seededRandom(`two-events/${seed}/${index}`);
  const apartK = random.between(35, 60);
  const firstK = random.between(550, 700);
  const first = 1e3 * random.between(180, 350);
  const second = first * random.between(0.7, 1.4);
  const energies: [number, number] = [first, second];
  const enthalpies = [random.between(20e3, 60e3), random.between(20e3, 60e3)];
  const laws = energies.map((energy, k) => arrheniusLawWithPeak(energy, firstK + k * apartK, RATES[2]));
  const exponents = [random.between(2, 4), random.between(2, 4)];
  const reduced = RATES.map((rate): ReducedScan | undefined => {
    const limits = laws.map((law, k) => programmeLimits(law, exponents[k], [rate], 5));
    const model: ScanModel = {
      sample: {
        events: laws.map((temperature, k) => ({
          temperature,
          rate: jmakLaw(exponents[k]),
          enthalpyJPerKg: enthalpies[k],
        })),
      },
      instrument: { offsetK: random.between(-1, 1), shiftS: 2, responseS: 1 },
      programme: rampProgramme(limits[0].startK, Math.max(limits[0].endK, limits[1].endK), rate),
      massKg: 8e-6,
    };
    const recording = { noise: 0.005, drift: 0.05 };
    const outcome = reduceModel(model, { rows: 3000, recording }, random.fork(`rate ${rate}`));
    return outcome.ok ? outcome.reduced : undefined;
  });
  const scans = reduced.flatMap((r, k) => (r ? [{ key: `${RATES[k]} K/s`, events: r.events }] : []));
  const { numbers } = matchEvents(scans);
  const areaErrors: number[] = [];
  const errors = energies.map((energy, k) => {
    const found = scans.flatMap(({ events }, s) => events.filter((_, i) => numbers[s][i] === k + 1));
    for (const event of found)
      if (event.enthalpyJPerKg !== undefined) areaErrors.push(event.enthalpyJPerKg / enthalpies[k] - 1);
    if (found.length < 3) return Number.NaN;
    const fit = fitEnergyLine(
      found.map((e) => e.rateKPerS),
      found.map((e) => e.peakK),
      KISSINGER.power,
      KISSINGER.factor,
    );
    return fit.energy / energy - 1;
  });
  const merged = reduced.filter((r) => r?.flags.some(({ code }) => code === 'events-merged')).length;
  return { apartK, energies, errors: [errors[0], errors[1]], areaErrors, merged };
}

export function twoEventsStudy({ count = 20, seed }: StudyOptions): string {
  const results = Array.from({ length: count }, (_, index) => reduceTwoEvents(seed, index));
  const rows = [0, 1].map((k) => {
    const sizes = results.map((r) => Math.abs(r.errors[k])).filter(Number.isFinite);
    const within = sizes.filter((v) => v <= 0.03).length;
    const cells = [percent(quantile(sizes, 0.5)), percent(quantile(sizes, 0.95)), percent(quantile(sizes, 1))];
    return [`event ${k + 1}`, ...cells, `${within} of ${count}`];
  });
  const areas = results.flatMap((r) => r.areaErrors.map(Math.abs));
  const merged = results.reduce((sum, r) => sum + r.merged, 0);
  return [
    `Kissinger’s E of two events 35 to 60 K apart, five rates each, ${count} samples; ${merged} of ${count * RATES.length} scans merged.`,
    markdownTable(['', 'median |error|', '95th percentile', 'worst', 'within 3 %'], rows),
    `Areas: median |error| ${percent(quantile(areas, 0.5))}, 95th percentile ${percent(quantile(areas, 0.95))}.`,
  ].join('\n\n');
}
