import {
  arrheniusLawWithPeak,
  eventTruths,
  jmakLaw,
  programmeLimits,
  R,
  type RecordingSettings,
  rampProgramme,
  type ScanModel,
  seededRandom,
} from './generator/index.ts';
import { reduceModel } from './reduce-model.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** A kind of scan with or without a glass transition; heights are parts of the event's height. */
export interface GlassCase {
  name: string;
  recording: RecordingSettings;
  /** A drift of any size up to this one, instead of the recording's */
  driftUpTo?: number;
  /** No exotherm in the scan */
  alone?: boolean;
}

const NOISE = 0.003;
export const GLASS_CASES: GlassCase[] = [
  { name: 'drift up to 100 %', recording: { noise: NOISE, drift: 0 }, driftUpTo: 1 },
  { name: '… no event in the scan', recording: { noise: NOISE, drift: 0 }, driftUpTo: 1, alone: true },
  { name: '… 5 spikes', recording: { noise: NOISE, drift: 0, spikes: { count: 5, height: 1 } }, driftUpTo: 1 },
  {
    name: '… 3 jumps of up to 10 %',
    recording: { noise: NOISE, drift: 0, jumps: { count: 3, height: 0.1 } },
    driftUpTo: 0.2,
  },
  {
    name: '… settling from 30 %',
    recording: { noise: NOISE, drift: 0, settling: { height: -0.3, part: 0.03 } },
    driftUpTo: 0.2,
  },
  { name: '… pink noise 0.3 %', recording: { noise: NOISE, drift: 0, pinkNoise: NOISE }, driftUpTo: 0.2 },
];

export interface GlassResult {
  /** Error of the midpoint, widths of the event; missing where no glass transition was given */
  error?: number;
  found: boolean;
  doubtful: boolean;
}

/** One simulated scan; with a glass transition 1.5 to 6 widths below the event, its step 5 to 30 % of the event's height. */
export function reduceForGlass(of: GlassCase, hasGlass: boolean, seed: string, index: number): GlassResult {
  const random = seededRandom(`glass/${seed}/${index}`);
  const rateKPerS = random.betweenLog(0.03, 40_000);
  const peakK = random.between(380, 850);
  const energy = R * peakK * random.between(20, 70);
  const exponent = random.between(1.5, 4);
  const enthalpyJPerKg = random.betweenLog(10e3, 120e3);
  const widthK = (2.446 * R * peakK ** 2) / (exponent * energy);
  const temperature = arrheniusLawWithPeak(energy, peakK, rateKPerS);
  const event = { temperature, rate: jmakLaw(exponent), enthalpyJPerKg };
  const below = random.between(1.5, 6);
  const glassK = peakK - below * widthK;
  const step = random.betweenLog(0.05, 0.3);
  const spread = random.between(0.05, 0.15);
  const limits = programmeLimits(temperature, exponent, [rateKPerS], 4);
  const startK = Math.min(limits.startK, peakK - (below + 3) * widthK);
  const whole: ScanModel = {
    sample: {
      events: [event],
      heatCapacity: { jPerKgK: 0, slopeJPerKgK2: 0, referenceK: peakK },
      ...(hasGlass && {
        glassTransition: {
          temperatureK: glassK,
          widthK: spread * widthK,
          stepJPerKgK: (step * enthalpyJPerKg) / widthK,
          overshootJPerKg: 0,
        },
      }),
    },
    instrument: { offsetK: 0, shiftS: 0, responseS: 0 },
    programme: rampProgramme(startK, limits.endK, rateKPerS),
    massKg: rateKPerS < 10 ? 8e-6 : 50e-12,
  };
  const [truth] = eventTruths(whole);
  const quiet = { ...event, enthalpyJPerKg: 1e-9 * enthalpyJPerKg };
  const model = of.alone ? { ...whole, sample: { ...whole.sample, events: [quiet] } } : whole;
  const drift = of.driftUpTo === undefined ? of.recording.drift : random.between(0, of.driftUpTo);
  const outcome = reduceModel(
    model,
    {
      rows: Math.round((whole.programme.endS / truth.widthS) * random.between(40, 200)),
      recording: { ...of.recording, drift },
      kind: rateKPerS < 10 ? 'furnace' : 'chip',
      heightW: whole.massKg * enthalpyJPerKg * truth.ratePerS,
    },
    random,
  );
  if (!outcome.ok) return { found: false, doubtful: false };
  const { glassTransitionK, flags } = outcome.reduced;
  return {
    found: glassTransitionK !== undefined,
    doubtful: flags.some(({ code }) => code === 'glass-transition-doubtful'),
    ...(glassTransitionK !== undefined && { error: (glassTransitionK - glassK) / widthK }),
  };
}

/** Further off than this the answer is a wrong one, widths of the event. */
const WRONG = 0.2;

export function glassStudy({ count = 100, seed }: StudyOptions): string {
  const share = (of: GlassResult[], is: (r: GlassResult) => boolean) => percent(of.filter(is).length / of.length, 1);
  const rows = GLASS_CASES.map((of) => {
    const [without, within] = [false, true].map((has) =>
      Array.from({ length: count }, (_, index) => reduceForGlass(of, has, seed, index)),
    );
    const errors = within.flatMap(({ error }) => (error === undefined ? [] : [Math.abs(error)]));
    return [
      of.name,
      share(without, (r) => r.found),
      share(without, (r) => r.doubtful),
      share(within, (r) => r.found && Math.abs(r.error ?? 1) <= WRONG),
      share(within, (r) => r.found && Math.abs(r.error ?? 1) > WRONG),
      share(within, (r) => r.doubtful),
      errors.length ? `${percent(quantile(errors, 0.5), 1)} / ${percent(quantile(errors, 0.95), 1)}` : '–',
    ];
  });
  return [
    `${count} scans a row without a glass transition, and the same with one 1.5 to 6 widths below the event (step 5 to 30 % of its height); noise 0.3 %.`,
    markdownTable(
      ['scan', 'none: found', 'none: flagged', 'one: found', 'one: wrong', 'one: flagged', 'midpoint, widths'],
      rows,
    ),
  ].join('\n\n');
}
