import type { AdviceRow } from '../../schema/wire/forecasts.ts';
import type { Candidate } from './advice-candidates.ts';
import { rateText, SAME_RATE } from './rates.ts';

const short = (x: number): string => String(Number(x.toPrecision(3)));

const GOAL_WORDS: Record<AdviceRow['goal'], string> = {
  energy: 'the activation energy at half conversion',
  bend: 'the bend of the rate law',
  forecast: 'the forecast time',
};

/** Why this scan, in one sentence: what it adds to the rates there are, and by how much it is expected to narrow the interval. */
export function adviceSentence(
  goal: AdviceRow['goal'],
  { instrument, rateKPerS }: Candidate,
  interval: { now: number; expected: number; unit: AdviceRow['unit'] },
  run: readonly Candidate[],
): string {
  const unit = interval.unit === '1' ? '' : ` ${interval.unit === 'decades' ? 'decades' : interval.unit}`;
  return `One more scan at ${rateText(rateKPerS)} on ${instrument} ${reason(instrument, rateKPerS, run)} and is expected to narrow the 95 % interval of ${GOAL_WORDS[goal]} from ${short(interval.now)} to ${short(interval.expected)}${unit}.`;
}

function reason(instrument: string, rate: number, run: readonly Candidate[]): string {
  const rates = run.map((c) => c.rateKPerS);
  const [low, high] = [Math.min(...rates), Math.max(...rates)];
  if (rate > high * (1 + SAME_RATE)) return `widens the rates upwards by a factor of ${short(rate / high)}`;
  if (rate < low / (1 + SAME_RATE)) return `widens the rates downwards by a factor of ${short(low / rate)}`;
  const same = run.filter((c) => Math.abs(c.rateKPerS / rate - 1) <= SAME_RATE);
  if (same.some((c) => c.instrument === instrument)) return 'repeats a rate that carries much of the result';
  if (same.length > 0) return `measures a rate that ${same[0].instrument} has run, so that the two can be compared`;
  return 'fills the range where the result is weakest';
}
