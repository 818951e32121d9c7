import { expect, test } from 'vitest';
import { sharedRateCurve } from '../../jobs/forecast/index.ts';
import { straightRateCurve } from '../../jobs/forecast/rate-curve.ts';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import { lnRateOf, localEnergyOf } from '../../jobs/glass/shared-law-values.ts';
import { fitLine } from '../../jobs/numeric/line.ts';
import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { seededRandom } from '../study/generator/random.ts';
import { decoupledLaw } from '../study/generator/temperature-laws.ts';
import { drawCampaign } from '../study/verdict-campaigns.ts';

const R = 8.31446261815324;
const melting = { temperatureK: 850, enthalpyJPerMol: 10_000 };
// The generator's own law: MYEGA with m = 12 − log10 η∞ is Arrhenius, so that the bend is the driving force's alone.
const truth = decoupledLaw(
  { glassTransitionK: 500, fragility: 14.93, log10Infinity: -2.93 },
  { decoupling: 0.9, anchorK: 550, lnKAnchor: -3, melting },
);
const law: SharedLaw = {
  sample: '',
  event: 1,
  lnRateAtMiddle: truth.lnK(600),
  energyJPerMol: 0.9 * Math.LN10 * 14.93 * R * 500,
  bend: 0,
  x0PerK: 1 / 600,
  dxPerK: 3e-4,
  avramiExponent: 3,
  frozenBelowK: 520,
  lowestMeasuredK: 520,
  highestMeasuredK: 740,
  driving: melting,
};

test('K and local energy of a law with a driving force are those of the generator', () => {
  for (const T of [520, 600, 700, 800, 845]) {
    expect(lnRateOf(law, T)).toBeCloseTo(truth.lnK(T), 9);
    expect(localEnergyOf(law, T) / truth.localEnergy(T)).toBeCloseTo(1, 9);
  }
});

test('a forecast counts the driving force once, up to melting, and holds the local energy below the frozen point', () => {
  const curve = sharedRateCurve(law, law, { meltingK: 850, enthalpyJPerMol: 10_000 });
  for (const T of [530, 700, 800, 845]) expect(curve.lnRate(T)).toBeCloseTo(truth.lnK(T), 9);
  expect(curve.lnRate(851)).toBe(Number.NEGATIVE_INFINITY);
  const below = (T: number) => truth.lnK(520) - (truth.localEnergy(520) / R) * (1 / T - 1 / 520);
  expect(curve.lnRate(450)).toBeCloseTo(below(450), 9);
});

test('the pessimistic straight law is the least-squares line of ln K over the measured span', () => {
  const x = Array.from({ length: 400 }, (_, k) => 1 / 740 + ((1 / 520 - 1 / 740) * (k + 0.5)) / 400);
  const line = fitLine(
    x,
    x.map((v) => truth.lnK(1 / v)),
  );
  const straight = straightRateCurve(law, law);
  // The bent part's line is taken over u = −1 … 1, which for q = 0 is the law itself.
  expect(straight.lnRate(450)).toBeCloseTo(line.intercept + line.slope / 450, 1);
  expect(straight.steepness(450) / (-line.slope * R)).toBeCloseTo(1, 2);
});

test('near melting the fitted law carries the driving force, and E at the fast end is right with it alone', () => {
  const misses = (facts: 'melting' | 'none') =>
    ['n1', 'n2', 'n3', 'n4', 'n5', 'n6'].map((seed) => {
      const c = drawCampaign(seededRandom(seed), seed, { kind: 'glass', lags: 'right', replicates: 3, noise: 0.003 });
      const { meltingEnthalpyJPerKg, ...rest } = c.input.facts;
      const input = { ...c.input, draws: 60, facts: facts === 'melting' ? { ...rest, meltingEnthalpyJPerKg } : rest };
      const { parameters, sharedLaws } = judgeCurvature(input);
      expect(sharedLaws[0].law.driving !== undefined).toBe(facts === 'melting');
      const row = parameters.filter((p) => p.quantity === 'local_activation_energy').at(-1)!;
      return Math.abs(row.value / (c.law.localEnergy(row.temperature_K!) / 1e3) - 1);
    });
  const mean = (v: number[]) => v.reduce((s, x) => s + x, 0) / v.length;
  expect(mean(misses('melting'))).toBeLessThan(0.04);
  expect(mean(misses('none'))).toBeGreaterThan(mean(misses('melting')));
});
