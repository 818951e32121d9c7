import { type AdviceRow, FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { collectEvent, distinctRates } from '../kinetics/event-data.ts';
import { findScatter } from '../kinetics/monte-carlo.ts';
import { type Candidate, isUsable, listCandidates } from './advice-candidates.ts';
import { EnergyPrecision, eventWidthK } from './advice-energy.ts';
import type { AdviceGoal, AdviceInput } from './advice-input.ts';
import { analyseForAdvice, forecastGoal, type LawGoal, LawPrecision } from './advice-law.ts';
import { adviceSentence } from './advice-sentence.ts';
import { compareText } from './rates.ts';

/** One candidate weighed for one goal, widths in the goal's unit. */
export interface WeighedScan extends Candidate {
  now: number;
  expected: number;
}

const TOP = 3;
/** More scans than this are no advice. */
const MOST_SCANS = 20;
const UNITS: Record<AdviceRow['goal'], AdviceRow['unit']> = { energy: 'kJ/mol', bend: '1', forecast: 'decades' };

/** Full 95 % width of a goal, now or with `count` further scans of one kind; undefined where the scans cannot give it. */
export type Width = (more?: Candidate, count?: number) => number | undefined;

/**
 * The three scans that are expected to narrow each goal most, from the linearised covariance with one more row. Rows by goal in
 * the order asked, then by rank. A goal that the scans cannot give at all has no rows.
 */
export function adviseScans(input: AdviceInput): AdviceRow[] {
  const ofGoal = widthsOf(input);
  return input.goals.flatMap((goal) => {
    const width = ofGoal(goal);
    const weighed = weighScans(input, goal, width);
    const run = input.scans.map((s) => ({ instrument: s.instrument, rateKPerS: s.event.rateKPerS }));
    return weighed.slice(0, TOP).map((w, i): AdviceRow => {
      const unit = UNITS[goal.goal];
      return {
        sample: input.sample,
        rank: i + 1,
        instrument: w.instrument,
        rate_K_per_s: w.rateKPerS,
        goal: goal.goal,
        interval_now: w.now,
        interval_expected: w.expected,
        event: input.event,
        unit,
        scans_to_half: scansToReach(width, w, 0.5),
        sentence: adviceSentence(goal.goal, w, { now: w.now, expected: w.expected, unit }, run),
        caution: FORECAST_CAUTION,
      };
    });
  });
}

/** All candidates of a goal, the best first; equal ones by instrument, then rate. */
export function weighScans(input: AdviceInput, goal: AdviceGoal, width = widthsOf(input)(goal)): WeighedScan[] {
  const linear = width();
  if (linear === undefined || !(linear > 0)) return [];
  const now = goal.now ?? linear;
  const temperature = expectedTemperatures(input);
  const candidates = listCandidates(
    input.instruments,
    input.ranges,
    input.scans.map((s) => s.event.rateKPerS),
    ({ instrument, rateKPerS }) => {
      const T = temperature(rateKPerS);
      const c = input.instruments.find((i) => i.instrument === instrument)!;
      const widthK = eventWidthK(T, input.energyJPerMol, input.avramiExponent);
      return isUsable(c, rateKPerS, widthK) && (input.meltingK === undefined || T + widthK < input.meltingK);
    },
  );
  return candidates
    .flatMap((candidate): WeighedScan[] => {
      const after = width(candidate);
      return after === undefined ? [] : [{ ...candidate, now, expected: (now * after) / linear }];
    })
    .sort((a, b) => a.expected - b.expected || compareText(a.instrument, b.instrument) || a.rateKPerS - b.rateKPerS);
}

/** How many scans like this one are expected to bring the width down to a part of what it is; null where that is out of reach. */
export function scansToReach(width: Width, candidate: Candidate, part: number): number | null {
  const now = width();
  if (now === undefined) return null;
  const reached = (count: number) => (width(candidate, count) ?? Number.POSITIVE_INFINITY) <= part * now;
  if (!reached(MOST_SCANS)) return null;
  // Every further scan narrows it: the smallest number that does is found by halving.
  let [less, enough] = [0, MOST_SCANS];
  while (enough - less > 1) {
    const middle = (less + enough) >> 1;
    if (reached(middle)) enough = middle;
    else less = middle;
  }
  return enough;
}

/** The width of any goal as a function of further scans; the fits behind them are made once, and only where a goal needs them. */
export function widthsOf(input: AdviceInput): (goal: AdviceGoal) => Width {
  let made: { analyses: ReturnType<typeof analyseForAdvice> } | undefined;
  return (goal) => {
    if (goal.goal === 'energy') return energyWidth(input);
    made ??= { analyses: analyseForAdvice(input) };
    const analysis = made.analyses?.[goal.goal];
    if (!analysis) return () => undefined;
    const precision = new LawPrecision(analysis);
    const wanted: LawGoal =
      goal.goal === 'bend'
        ? { gradient: [0, 0, analysis.bend.span], exponentVariance: 0, decides: [[0, 0, 1]] }
        : forecastGoal(analysis, goal.conversion, goal.temperatureK, input);
    return (more, count) => precision.width(wanted, more, count);
  };
}

function energyWidth(input: AdviceInput): Width {
  const { event, scans, instruments } = input;
  const data = collectEvent(event, scans, instruments);
  const curves = Uint16Array.from(Array.from(data.hasCurve.keys()).filter((i) => data.hasCurve[i] === 1));
  const rates = distinctRates(data.rate);
  if (rates.length < 2 || data.n < 3) return () => undefined;
  const precision = new EnergyPrecision(data, findScatter(data, curves, rates.length), input.energyJPerMol);
  const temperature = expectedTemperatures(input);
  return (more, count) => {
    const width = precision.width(more && { ...more, temperatureK: temperature(more.rateKPerS) }, count);
    return width === undefined ? undefined : width * 1e-3;
  };
}

/** Temperature of the event expected at a rate, K: along Kissinger's condition with the energy at hand, through the scan nearest in rate. */
function expectedTemperatures({ scans, energyJPerMol }: AdviceInput): (rateKPerS: number) => number {
  const lnRates = scans.map((s) => Math.log(s.event.rateKPerS));
  const known = new Map<number, number>();
  return (rate) => {
    const found = known.get(rate);
    if (found !== undefined) return found;
    const ln = Math.log(rate);
    let near = 0;
    for (let i = 1; i < scans.length; i++) if (Math.abs(lnRates[i] - ln) < Math.abs(lnRates[near] - ln)) near = i;
    const { peakK } = scans[near].event;
    // ln(β/T²) falls by E/R for each 1/K.
    let T = peakK;
    for (let i = 0; i < 30; i++) {
      const next = 1 / (1 / peakK - (GAS_CONSTANT / energyJPerMol) * (ln - lnRates[near] - 2 * Math.log(T / peakK)));
      const step = Math.abs(next - T);
      T = next;
      if (step < 1e-12 * T) break;
    }
    known.set(rate, T);
    return T;
  };
}
