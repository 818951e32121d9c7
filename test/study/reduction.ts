import {
  arrheniusLawWithPeak,
  eventTruths,
  jmakLaw,
  programmeLimits,
  R,
  type Random,
  type RecordingSettings,
  rampProgramme,
  type SampleModel,
  type ScanModel,
  seededRandom,
  sestakBerggrenLaw,
} from './generator/index.ts';
import { reduceModel } from './reduce-model.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** One hard feature at a time on top of the plain case; what is left out is as in PLAIN. */
export interface Difficulty {
  name: string;
  recording?: Partial<RecordingSettings>;
  points?: number;
  uneven?: { jitter: number; lost: number };
  /** Response ÷ width in time, told to the reduction */
  response?: number;
  /** Heat capacity in units of ΔH/FWHM: what plain warming shows beside the event */
  heatCapacity?: number;
  /** Crystal's step of the heat capacity, the same unit */
  crystalStep?: number;
  /** Glass transition this many widths below the peak: step as above, logistic width a tenth of the event's */
  glassTransition?: { widthsBelow: number; step: number; overshoot?: number };
  /** Melting this many widths above the peak, of the event's own heat, a third as wide */
  meltingAbove?: number;
  /** Self-heating number, and whether the sheet leaves out the heat capacity */
  selfHeating?: number;
  heatCapacityUnknown?: boolean;
  /** A second event of the same law this many widths above, with this part of the first one's heat */
  overlap?: {
    widthsAbove: number;
    part: number;
    law?: readonly [number, number];
    /** Exponent of its JMAK law and its energy ÷ the first one's */
    exponent?: number;
    energy?: number;
  };
  /** Exponents M and N of a Šesták–Berggren law in the place of JMAK's */
  law?: readonly [number, number];
}

const PLAIN = { noise: 0.003, drift: 0.05, points: 100 };

export const DIFFICULTIES: Difficulty[] = [
  { name: 'no noise, no drift', recording: { noise: 0, drift: 0 } },
  { name: 'plain: noise 0.3 %, drift 5 %, 100 points' },
  { name: 'noise 1 %', recording: { noise: 0.01 } },
  { name: 'noise 2 %', recording: { noise: 0.02 } },
  { name: 'noise 5 %', recording: { noise: 0.05 } },
  { name: 'pink noise 0.3 %', recording: { pinkNoise: 0.003 } },
  { name: 'pink noise 1 %, white 0.1 %', recording: { noise: 0.001, pinkNoise: 0.01 } },
  { name: 'drift 5 %, parabola', recording: { driftOrder: 2 } },
  { name: 'drift 20 %, parabola', recording: { drift: 0.2, driftOrder: 2 } },
  { name: 'drift 20 %', recording: { drift: 0.2 } },
  { name: 'drift 100 %', recording: { drift: 1 } },
  { name: 'noise 1 %, drift 20 %', recording: { noise: 0.01, drift: 0.2 } },
  { name: '1000 points', points: 1000 },
  { name: '20 points', points: 20 },
  { name: '10 points', points: 10 },
  { name: '6 points', points: 6 },
  { name: 'uneven sampling, 10 % lost', uneven: { jitter: 0.45, lost: 0.1 } },
  { name: 'spikes: 5 of 3 heights', recording: { spikes: { count: 5, height: 3 } } },
  { name: 'response 0.1 of the width', response: 0.1 },
  { name: 'response 0.3 of the width', response: 0.3 },
  { name: 'response 0.8 of the width', response: 0.8 },
  { name: 'warming as high as the event', heatCapacity: 1 },
  { name: 'crystal step −5 %', crystalStep: -0.05 },
  { name: 'glass transition 3 widths below', glassTransition: { widthsBelow: 3, step: 0.15 } },
  { name: 'glass transition 1.5 widths below', glassTransition: { widthsBelow: 1.5, step: 0.15 } },
  { name: 'glass transition 1 width below', glassTransition: { widthsBelow: 1, step: 0.15 } },
  { name: 'glass transition 6 widths below', glassTransition: { widthsBelow: 6, step: 0.15 } },
  {
    name: 'glass transition 1 width below, noise 1 %',
    glassTransition: { widthsBelow: 1, step: 0.15 },
    recording: { noise: 0.01 },
  },
  {
    name: 'glass transition 1 width below, noise 1 %, drift 20 %, crystal step −5 %',
    glassTransition: { widthsBelow: 1, step: 0.15 },
    recording: { noise: 0.01, drift: 0.2 },
    crystalStep: -0.05,
  },
  {
    name: 'glass transition 1 width below, overshoot 2 %',
    glassTransition: { widthsBelow: 1, step: 0.15, overshoot: 0.02 },
  },
  {
    name: 'glass transition 1 width below, another law',
    glassTransition: { widthsBelow: 1, step: 0.15 },
    law: [0.6, 1.2],
  },
  {
    name: 'glass transition 1 width below, response 0.1',
    glassTransition: { widthsBelow: 1, step: 0.15 },
    response: 0.1,
  },
  { name: 'another law: M 0.6, N 1.2', law: [0.6, 1.2] },
  { name: 'another law: M 0.3, N 2', law: [0.3, 2] },
  { name: 'another law: M 0.75, N 1, noise 1 %', law: [0.75, 1], recording: { noise: 0.01 } },
  { name: 'melting 3 widths above', meltingAbove: 3 },
  { name: 'melting 1.5 widths above', meltingAbove: 1.5 },
  { name: 'melting 1 width above', meltingAbove: 1 },
  { name: 'second event 2 widths above', overlap: { widthsAbove: 2, part: 0.7 } },
  { name: 'second event 1 width above', overlap: { widthsAbove: 1, part: 0.7 } },
  { name: 'second event 1 width above, noise 1 %', overlap: { widthsAbove: 1, part: 0.7 }, recording: { noise: 0.01 } },
  {
    name: 'second event 1 width above, both of another law',
    overlap: { widthsAbove: 1, part: 0.7, law: [0.6, 1.2] },
    law: [0.6, 1.2],
  },
  {
    name: 'second event 1 width above, both of another law, energies apart by 20 %',
    overlap: { widthsAbove: 1, part: 0.7, law: [0.6, 1.2], energy: 1.2 },
    law: [0.6, 1.2],
  },
  {
    name: 'second event 1 width above, both of another law with a long tail',
    overlap: { widthsAbove: 1, part: 0.7, law: [0.5, 1.5] },
    law: [0.5, 1.5],
  },
  {
    name: 'second event 1 width above, the first of another law, the second JMAK',
    overlap: { widthsAbove: 1, part: 0.7, exponent: 3 },
    law: [0.6, 1.2],
  },
  {
    name: 'second event 1 width above, both JMAK, energies apart by 20 %',
    overlap: { widthsAbove: 1, part: 0.7, energy: 1.2 },
  },
  { name: 'self-heating S = 0.1', selfHeating: 0.1 },
  { name: 'self-heating S = 0.3', selfHeating: 0.3 },
  { name: 'self-heating S = 0.5', selfHeating: 0.5 },
  { name: 'self-heating S = 0.1, heat capacity not known', selfHeating: 0.1, heatCapacityUnknown: true },
  { name: 'self-heating S = 0.5, heat capacity not known', selfHeating: 0.5, heatCapacityUnknown: true },
];

/** Errors of temperatures in units of the event's true width, of ΔH relative; missing where nothing came. */
export interface ReductionErrors {
  peak?: number;
  early?: number;
  half?: number;
  late?: number;
  enthalpy?: number;
  /** Errors of ΔH, T(0.5) and Tp ÷ the errors stated for them: area, baseline, peak */
  enthalpyInErrors?: number;
  halfInErrors?: number;
  peakInErrors?: number;
  /** Midpoint of the glass transition, in units of the event's width */
  glassTransition?: number;
  /** What stopped it */
  reason?: string;
  /** Codes of the flags raised */
  flags: string[];
}

interface Drawn {
  model: ScanModel;
  rateKPerS: number;
}

/** A scan at 0.03 … 40 000 K/s with E/(R Tp) between 20 and 70. */
function drawScan(difficulty: Difficulty, random: Random): Drawn {
  const rateKPerS = random.betweenLog(0.03, 40_000);
  const peakK = random.between(380, 850);
  const energy = R * peakK * random.between(20, 70);
  // A Šesták–Berggren event is about as sharp as a JMAK one of n = 1/(1 − M).
  const drawn = random.between(1.5, 4);
  const exponent = difficulty.law ? 1 / (1 - difficulty.law[0]) : drawn;
  const enthalpyJPerKg = random.betweenLog(10e3, 120e3);
  const temperature = arrheniusLawWithPeak(energy, peakK, rateKPerS);
  const widthK = (2.446 * R * peakK ** 2) / (exponent * energy);
  const widthS = widthK / rateKPerS;
  const unit = enthalpyJPerKg / widthK;
  const { glassTransition: glass, meltingAbove, overlap, law } = difficulty;
  const rate = law ? sestakBerggrenLaw(...law) : jmakLaw(exponent);
  const sample: SampleModel = {
    events: [
      { temperature, rate, enthalpyJPerKg },
      ...(overlap
        ? [
            {
              temperature: arrheniusLawWithPeak(
                energy * (overlap.energy ?? 1),
                peakK + overlap.widthsAbove * widthK,
                rateKPerS,
              ),
              rate: overlap.law ? sestakBerggrenLaw(...overlap.law) : jmakLaw(overlap.exponent ?? exponent),
              enthalpyJPerKg: overlap.part * enthalpyJPerKg,
            },
          ]
        : []),
    ],
    heatCapacity: { jPerKgK: (difficulty.heatCapacity ?? 0) * unit, slopeJPerKgK2: 0, referenceK: peakK },
    crystalStepJPerKgK: (difficulty.crystalStep ?? 0) * unit,
    glassTransition: glass && {
      temperatureK: peakK - glass.widthsBelow * widthK,
      widthK: widthK / 10,
      stepJPerKgK: glass.step * unit,
      overshootJPerKg: (glass.overshoot ?? 0) * enthalpyJPerKg,
    },
    melting:
      meltingAbove === undefined
        ? undefined
        : { temperatureK: peakK + meltingAbove * widthK, widthK: widthK / 10, enthalpyJPerKg },
  };
  const limits = programmeLimits(temperature, exponent, [rateKPerS], 4);
  const model: ScanModel = {
    sample,
    instrument: {
      offsetK: random.between(-1, 1),
      shiftS: 0.1 * widthS,
      responseS: (difficulty.response ?? 0) * widthS,
    },
    programme: rampProgramme(
      Math.min(limits.startK, peakK - ((glass?.widthsBelow ?? 0) + (law ? 6 : 3)) * widthK),
      Math.max(limits.endK, peakK + ((meltingAbove ?? overlap?.widthsAbove ?? 0) + (law ? 7 : 4)) * widthK),
      rateKPerS,
    ),
    massKg: rateKPerS < 10 ? 8e-6 : 50e-12,
  };
  if (difficulty.selfHeating !== undefined) {
    const heatCapacityJPerKgK = 1500;
    // S = contact (ΔH/c_p) (dα/dt)_max E/(R T²), (dα/dt)_max ≈ n/(e) × E β/(R T²) from K R T²/(E β) = 1 at the peak
    const sharpness = energy / (R * peakK ** 2);
    const steepest = (exponent / Math.E) * sharpness * rateKPerS;
    const contactS = difficulty.selfHeating / ((enthalpyJPerKg / heatCapacityJPerKgK) * steepest * sharpness);
    model.selfHeating = { contactS, heatCapacityJPerKgK };
  }
  return { model, rateKPerS };
}

/** Simulates and reduces one scan; `index` and `seed` fix it whatever the difficulty, so that columns compare like with like. */
export function reduceSimulated(difficulty: Difficulty, seed: string, index: number): ReductionErrors {
  const random = seededRandom(`reduction/${seed}/${index}`);
  const { model, rateKPerS } = drawScan(difficulty, random);
  const [truth] = eventTruths(model);
  const { endS } = model.programme;
  const points = difficulty.points ?? PLAIN.points;
  const rows = Math.max(40, Math.round((endS / truth.widthS) * points));
  const uneven = difficulty.uneven && { ...difficulty.uneven, random: random.fork('sampling') };
  const kind = rateKPerS < 10 ? 'furnace' : 'chip';
  const recording = { ...PLAIN, ...difficulty.recording };
  const { heatCapacityUnknown } = difficulty;
  const outcome = reduceModel(model, { rows, recording, uneven, kind, heatCapacityUnknown }, random);
  if (!outcome.ok) return { reason: outcome.code, flags: [] };
  const { events, glassTransitionK } = outcome.reduced;
  const glass = model.sample.glassTransition;
  const flags = [...new Set(outcome.reduced.flags.map(({ code }) => code))];
  if (events.length === 0) return { reason: 'no event', flags };
  // The event nearest to the truth, should more than one have been found
  const event = events.reduce((a, b) => (Math.abs(b.peakK - truth.peakK) < Math.abs(a.peakK - truth.peakK) ? b : a));
  const at = (conversion: number): number | undefined =>
    event.curve &&
    (event.curve.temperatureK[Math.round(conversion * 100) - 1] - truth.temperatureAtK[conversion]) / truth.widthK;
  const enthalpy = event.enthalpyJPerKg && event.enthalpyJPerKg / model.sample.events[0].enthalpyJPerKg - 1;
  const half = at(0.5);
  return {
    peak: (event.peakK - truth.peakK) / truth.widthK,
    early: at(0.1),
    half,
    late: at(0.9),
    enthalpy,
    enthalpyInErrors: enthalpy && (enthalpy * event.area) / (event.areaError * (1 + enthalpy)),
    halfInErrors: event.curve && half && (half * truth.widthK) / event.curve.baselineErrorK[49],
    peakInErrors: (event.peakK - truth.peakK) / event.peakErrorK,
    glassTransition:
      glass && glassTransitionK !== undefined ? (glassTransitionK - glass.temperatureK) / truth.widthK : undefined,
    reason: event.curve ? undefined : 'no curve',
    flags,
  };
}

export function reductionStudy({ count = 40, seed }: StudyOptions): string {
  const columns = ['peak', 'early', 'half', 'late', 'enthalpy', 'glassTransition'] as const;
  const rows = DIFFICULTIES.map((difficulty) => {
    const results = Array.from({ length: count }, (_, index) => reduceSimulated(difficulty, seed, index));
    const cells = columns.map((column) => {
      const errors = results.flatMap((result) => (result[column] === undefined ? [] : [Math.abs(result[column])]));
      return errors.length === 0 ? '–' : `${percent(quantile(errors, 0.5), 1)} / ${percent(quantile(errors, 0.95), 1)}`;
    });
    const held = (['enthalpyInErrors', 'halfInErrors', 'peakInErrors'] as const).map((column) => {
      const sizes = results.flatMap((result) => (result[column] === undefined ? [] : [Math.abs(result[column])]));
      return sizes.length === 0 ? '–' : percent(sizes.filter((v) => v < 2).length / sizes.length, 0);
    });
    const reasons = results.flatMap(({ reason }) => reason ?? []);
    return [difficulty.name, ...cells, ...held, tally(reasons), tally(results.flatMap(({ flags }) => flags))];
  });
  return [
    `Median / 95th percentile of |error| over ${count} scans at 0.03 … 40 000 K/s; temperatures in units of the event's full width at half maximum.`,
    markdownTable(
      [
        'feature',
        'Tp',
        'T(0.1)',
        'T(0.5)',
        'T(0.9)',
        'ΔH',
        'Tg',
        'ΔH in 2 errors',
        'T(0.5) in 2 errors',
        'Tp in 2 errors',
        'not reduced',
        'flags',
      ],
      rows,
    ),
  ].join('\n\n');
}

/** `3 × this, 1 × that` */
function tally(words: readonly string[]): string {
  const counts = new Map<string, number>();
  for (const word of words) counts.set(word, (counts.get(word) ?? 0) + 1);
  return [...counts].map(([word, times]) => `${times} × ${word}`).join(', ');
}
