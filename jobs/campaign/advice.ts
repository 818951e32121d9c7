import type { AdviceRow } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { collectEvent, distinctRates } from '../kinetics/event-data.ts';
import { modelScatter } from '../kinetics/monte-carlo.ts';
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

/** Full 95 % width of a goal with further scans; undefined where these scans cannot give it. */
type Width = (more: readonly Candidate[]) => number | undefined;

/**
 * The three scans that are expected to narrow each goal most, from the linearised covariance with one more row. Rows by goal in
 * the order asked, then by rank. A goal that the scans cannot give at all has no rows.
 */
export function adviseScans(input: AdviceInput): AdviceRow[] {
  return input.goals.flatMap((goal) => {
    const width = widthOf(input, goal);
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
      };
    });
  });
}

/** All candidates of a goal, the best first; equal ones by instrument, then rate. */
export function weighScans(input: AdviceInput, goal: AdviceGoal, width = widthOf(input, goal)): WeighedScan[] {
  const linear = width([]);
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
      const after = width([candidate]);
      return after === undefined ? [] : [{ ...candidate, now, expected: (now * after) / linear }];
    })
    .sort((a, b) => a.expected - b.expected || compareText(a.instrument, b.instrument) || a.rateKPerS - b.rateKPerS);
}

/** How many scans like this one are expected to bring the width down to a part of what it is; null where that is out of reach. */
export function scansToReach(width: Width, { instrument, rateKPerS }: Candidate, part: number): number | null {
  const now = width([]);
  if (now === undefined) return null;
  const more: Candidate[] = [];
  while (more.length < MOST_SCANS) {
    more.push({ instrument, rateKPerS });
    const after = width(more);
    if (after === undefined) return null;
    if (after <= part * now) return more.length;
  }
  return null;
}

/** The width of a goal as a function of further scans; the fits behind it are made once. */
export function widthOf(input: AdviceInput, goal: AdviceGoal): Width {
  if (goal.goal === 'energy') return energyWidth(input);
  const analysis = analyseForAdvice(input, goal.goal);
  if (!analysis) return () => undefined;
  const precision = new LawPrecision(analysis);
  const wanted: LawGoal =
    goal.goal === 'bend'
      ? { gradient: [0, 0, analysis.span], exponentVariance: 0 }
      : forecastGoal(analysis, goal.conversion, goal.temperatureK, input);
  return (more) => precision.width(wanted, more);
}

function energyWidth(input: AdviceInput): Width {
  const { event, scans, instruments } = input;
  const data = collectEvent(event, scans, instruments);
  const curves = Uint16Array.from(Array.from(data.hasCurve.keys()).filter((i) => data.hasCurve[i] === 1));
  const rates = distinctRates(data.rate);
  if (rates.length < 2 || data.n < 3) return () => undefined;
  const precision = new EnergyPrecision(data, modelScatter(data, curves, rates.length), input.energyJPerMol);
  const temperature = expectedTemperatures(input);
  return (more) => {
    const width = precision.width(more.map((m) => ({ ...m, temperatureK: temperature(m.rateKPerS) })));
    return width === undefined ? undefined : width * 1e-3;
  };
}

/** Temperature of the event expected at a rate, K: along Kissinger's condition with the energy at hand, through the scan nearest in rate. */
function expectedTemperatures({ scans, energyJPerMol }: AdviceInput): (rateKPerS: number) => number {
  return (rate) => {
    const near = scans.reduce((a, b) =>
      Math.abs(Math.log(b.event.rateKPerS / rate)) < Math.abs(Math.log(a.event.rateKPerS / rate)) ? b : a,
    ).event;
    // ln(β/T²) falls by E/R for each 1/K.
    let T = near.peakK;
    for (let i = 0; i < 30; i++) {
      const step = Math.log(rate / near.rateKPerS) - 2 * Math.log(T / near.peakK);
      T = 1 / (1 / near.peakK - (GAS_CONSTANT / energyJPerMol) * step);
    }
    return T;
  };
}
