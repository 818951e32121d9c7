import { type WeighedScan, weighScans, widthsOf } from '../../jobs/campaign/advice.ts';
import type { AdviceGoal, AdviceInput } from '../../jobs/campaign/advice-input.ts';
import { answerQuestion } from '../../jobs/forecast/index.ts';
import { type DrawCauses, DrawSpread } from '../../jobs/kinetics/draw-spread.ts';
import { rampIntegrals } from '../../jobs/kinetics/estimate.ts';
import { CONVERSION_COUNT, collectEvent, distinctRates } from '../../jobs/kinetics/event-data.ts';
import { fitVyazovkin } from '../../jobs/kinetics/isoconversional/vyazovkin.ts';
import { drawBuffer, drawColumns, modelScatter, scanDegrees } from '../../jobs/kinetics/monte-carlo.ts';
import { createRandom } from '../../jobs/numeric/random.ts';
import { mean } from '../../jobs/numeric/statistics.ts';
import type { FitScan } from '../../schema/wire/parameters.ts';
import { drawForecastCampaign, type ForecastCampaign, sourceOfCampaign } from './forecast-campaigns.ts';
import { seededRandom } from './generator/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** Draws behind each width: known to 3 %. */
const DRAWS = 600;
/** The same of the shared law's, which cost more: known to 5 %. */
const LAW_DRAWS = 200;
const HALF = 9;
/**
 * Every candidate is run this many times, with the same deviates of mount and noise for all candidates (common random numbers), and the
 * geometric mean of the widths is what it is worth: one scan's own luck moves the scatter that is estimated anew, and with it the width, by
 * more than the candidates differ.
 */
const REPEATS = 4;
/** Of the candidates the first and every fourth of the rest are run, all ranks alike. */
const EVERY = 4;

/** Few scans on a furnace alone, or two a rate on furnace and chip. */
export type AdviceSetting = 'few' | 'full';

export interface AdviceTrial {
  goal: AdviceGoal['goal'];
  /** the law behind the goal stayed straight, or stayed bent, when the scan came in */
  lawKept: boolean;
  /** width obtained with the top suggestion ÷ the width that the median candidate obtained, each a mean over repeats */
  topAgainstMedian: number;
  /** the same with one run a candidate, the luck of each scan included */
  topAgainstMedianOnce: number;
  /** width predicted for the top suggestion ÷ width obtained, its mean over repeats */
  predicted: number;
  predictedOnce: number;
  /** width obtained with the top suggestion ÷ width before */
  narrowing: number;
  candidates: number;
}

/**
 * One campaign, one goal: candidates are run (simulated) and the width of its interval taken as the results would show it — E at α = 0.5 by
 * Vyazovkin over Monte Carlo draws, the forecast's band over the draws of the shared law, the bend by its fit made again.
 */
export function tryAdvice(seed: string, goal: AdviceGoal['goal'], setting: AdviceSetting): AdviceTrial | undefined {
  const random = seededRandom(`advice/${seed}/${goal}`);
  const bent = setting === 'full' && (goal === 'bend' || random.fork('law').integer(2) === 0);
  const campaign = drawForecastCampaign(`advice-${seed}`, bent ? 'bent' : 'straight', setting === 'full');
  const scans = setting === 'full' ? campaign.scans : furnaceScans(campaign, seed);
  const T = campaign.lowK - random.between(20, 60);
  const wanted: AdviceGoal = goal === 'forecast' ? { goal, conversion: 0.01, temperatureK: T } : { goal };
  const obtain = (all: FitScan[]) => obtainWidth({ ...campaign, scans: all }, wanted, seed);
  const before = obtain(scans);
  if (before === undefined) return undefined;
  const now = before.width;
  const input = inputOf({ ...campaign, scans }, wanted, now);
  const weighed = weighScans(input, input.goals[0]);
  if (weighed.length < 3) return undefined;
  const run = (w: WeighedScan) =>
    Array.from({ length: REPEATS }, (_, r) =>
      obtain([...scans, campaign.measure(w.instrument, w.rateKPerS, `next-${r}`)]),
    );
  const runs = weighed.filter((_, i) => i === 0 || i % EVERY === EVERY / 2).map(run);
  const kept = runs.map((all) => all.filter((r) => r?.bent === before.bent));
  const obtained = kept.map((all) => Math.exp(mean(all.map((r) => Math.log(r!.width)))));
  const once = runs.map(([r]) => r?.width ?? Number.NaN);
  return {
    goal,
    lawKept: kept[0].length > REPEATS / 2,
    topAgainstMedian: obtained[0] / quantile(obtained.filter(Number.isFinite), 0.5),
    topAgainstMedianOnce: once[0] / quantile(once.filter(Number.isFinite), 0.5),
    predicted: weighed[0].expected / obtained[0],
    predictedOnce: weighed[0].expected / once[0],
    narrowing: obtained[0] / now,
    candidates: weighed.length,
  };
}

/** Four to six rates over a factor of 6 to 20, one or two scans each: a campaign that has something left to gain. */
function furnaceScans(campaign: ForecastCampaign, seed: string): FitScan[] {
  const random = seededRandom(`advice-scans/${seed}`);
  const low = random.betweenLog(0.05, 0.2);
  const factor = random.between(6, 20);
  const count = 4 + random.integer(3);
  const replicates = 1 + random.integer(2);
  return Array.from({ length: count }, (_, i) => low * factor ** (i / (count - 1))).flatMap((rate, i) =>
    Array.from({ length: replicates }, (_, r) => campaign.measure('furnace-1', rate, `first-${i}-${r}`)),
  );
}

function inputOf(c: ForecastCampaign, goal: AdviceGoal, now: number): AdviceInput {
  const kinds = { 'furnace-1': [0.02, 8], 'chip-1': [5, 40000] } as Record<string, [number, number]>;
  const made = goal.goal === 'forecast' ? sourceOfCampaign(c, 'input', 100, false) : undefined;
  return {
    sample: 'S',
    event: 1,
    scans: c.scans,
    instruments: c.instruments,
    ranges: c.instruments.map(({ instrument }) => ({
      instrument,
      rateMinKPerS: kinds[instrument][0],
      rateMaxKPerS: kinds[instrument][1],
    })),
    energyJPerMol: energiesAtHalf(c, 'input', 0).energy,
    avramiExponent: c.exponent,
    verdict: made?.verdict,
    law: made?.source.law,
    lawDraws: made?.source.lawDraws,
    goals: [{ ...goal, now }],
  };
}

function obtainWidth(
  c: ForecastCampaign,
  goal: AdviceGoal,
  seed: string,
): { width: number; bent: boolean } | undefined {
  if (goal.goal === 'bend') {
    const width = widthsOf(inputOf(c, goal, 1))(goal)();
    return width === undefined ? undefined : { width, bent: true };
  }
  if (goal.goal === 'energy') {
    return { width: 2e-3 * energiesAtHalf(c, seed, DRAWS).halfWidth, bent: false };
  }
  const made = sourceOfCampaign(c, seed, LAW_DRAWS, false);
  if (!made) return undefined;
  const [row] = answerQuestion(made.source, {
    question: 'time_to_conversion',
    conversion: goal.conversion,
    temperatureK: goal.temperatureK,
  });
  return { width: Math.log10(row.upper95! / row.lower95!), bent: made.verdict === 'material' };
}

/** Vyazovkin's E at α = 0.5, J/mol: estimate from the ideal ramps, and the half width of its interval as the fit makes it. */
function energiesAtHalf(c: Pick<ForecastCampaign, 'scans' | 'instruments'>, seed: string, draws: number) {
  const data = collectEvent(1, c.scans, c.instruments);
  const curves = Uint16Array.from(data.hasCurve.keys());
  const model = modelScatter(data, curves, distinctRates(data.rate).length);
  const work = Array.from(curves, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
  const energyOf = (columns: Parameters<typeof rampIntegrals>[0], start: number) => {
    const ramp = rampIntegrals(columns, curves);
    let inverse = 0;
    for (let i = 0; i < data.n; i++) inverse += 1 / columns.temperatureK[i * CONVERSION_COUNT + HALF] / data.n;
    return fitVyazovkin((E, out) => ramp.step(E, inverse, HALF, out), model.weights, start, work).energy;
  };
  const energy = energyOf(data, 200e3);
  const columns = drawBuffer(data);
  const random = createRandom(`${seed}:energy`);
  const causes: DrawCauses[] = [];
  const drawn = Array.from({ length: draws }, () => {
    causes.push(drawColumns(model, random, columns));
    return energyOf(columns, energy);
  });
  const degrees = data.n - model.trendParameters;
  return { energy, halfWidth: new DrawSpread(causes, degrees, scanDegrees(model)).halfWidth(drawn) };
}

const SETTINGS: readonly [AdviceGoal['goal'], AdviceSetting][] = [
  ['energy', 'few'],
  ['energy', 'full'],
  ['forecast', 'few'],
  ['forecast', 'full'],
  ['bend', 'full'],
];

export function forecastAdviceStudy({ count = 100, seed }: StudyOptions): string {
  const rows = SETTINGS.map(([goal, setting]) => {
    const all = Array.from({ length: count }, (_, i) => tryAdvice(`${seed}/${i}`, goal, setting)).filter(
      (t) => t !== undefined,
    );
    const trials = all.filter((t) => t.lawKept);
    const share = (holds: (t: AdviceTrial) => boolean) => percent(trials.filter(holds).length / trials.length, 1);
    return [
      `${goal}, ${setting === 'few' ? 'few furnace scans' : 'furnace and chip'}`,
      `${trials.length} of ${all.length}`,
      quantile(
        trials.map((t) => t.candidates),
        0.5,
      ).toFixed(0),
      share((t) => t.topAgainstMedian <= 1),
      share((t) => t.topAgainstMedianOnce <= 1),
      share((t) => Math.abs(t.predicted - 1) <= 0.25),
      share((t) => Math.abs(t.predictedOnce - 1) <= 0.25),
      quantile(
        trials.map((t) => t.predicted),
        0.05,
      ).toFixed(2),
      quantile(
        trials.map((t) => t.predicted),
        0.5,
      ).toFixed(2),
      quantile(
        trials.map((t) => t.predicted),
        0.95,
      ).toFixed(2),
      quantile(
        trials.map((t) => t.narrowing),
        0.5,
      ).toFixed(2),
    ];
  });
  return markdownTable(
    [
      'goal',
      'campaigns where the law kept its kind',
      'candidates',
      'top at least as narrow as the median candidate',
      'the same, one run each',
      'predicted within 25 %',
      'the same, one run',
      'predicted ÷ obtained 5 %',
      'median',
      '95 %',
      'width left',
    ],
    rows,
  );
}
