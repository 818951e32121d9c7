import { expect, test } from 'vitest';
import { makeForecastSource } from '../../jobs/forecast/source.ts';
import { describeForecast } from '../../jobs/forecast/wording.ts';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import type { ForecastRow } from '../../schema/wire/forecasts.ts';
import { seededRandom } from '../study/generator/random.ts';
import { drawCampaign } from '../study/verdict-campaigns.ts';

// Gordon–Taylor (1952) with 340 K dry, 136 K for the solvent and k = 4.7, written out here.
const Tg = (w: number) => ((1 - w) * 340 + 4.7 * w * 136) / (1 - w + 4.7 * w);
const series = [0, 0.05, 0.1, 0.2, 1].map((w) => ({ solventFraction: w, glassTransitionK: Tg(w) }));

const judged = (compositions: typeof series) => {
  const { input } = drawCampaign(seededRandom('series'), 'series', { kind: 'straight', replicates: 2 });
  const facts = { series: 'trehalose-like', solventFraction: 0.08, compositions };
  return { facts, result: judgeCurvature({ ...input, draws: 100, facts }) };
};

test('a sample of a series takes its glass transition from the series where it has none of its own', () => {
  const { facts, result } = judged(series);
  const [{ law, draws, degreesOfFreedom }] = result.sharedLaws;
  expect(law.glassTransitionK).toBeCloseTo(Tg(0.08), 3);
  expect(result.events[0].sentences.join(' ')).toContain(`at w = 0.08 it is ${Tg(0.08).toFixed(1)} K`);
  const shared = { law, draws, degreesOfFreedom, verdict: result.verdicts[0].verdict };
  const source = makeForecastSource({ sample: 'S', event: 1, facts, shared });
  const row = { temperature_C: 90, value: 10, lower95: 5, upper95: 20, unit: 's', question: 'time_to_conversion' };
  const whole = { ...row, flags: [], beyond_measured_K: 0, beyond_measured_decades: 0 } as unknown as ForecastRow;
  expect(describeForecast(whole, source!, false)).toContain(`T − Tg(w) is ${(90 + 273.15 - Tg(0.08)).toFixed(1)} K`);
});

test('two compositions are too few, and the flag says so', () => {
  const { result } = judged(series.slice(0, 2));
  expect(result.sharedLaws[0].law.glassTransitionK).toBeUndefined();
  expect(result.flags.find((f) => f.code === 'method-not-applicable')?.detail).toContain('2 of its compositions');
});
