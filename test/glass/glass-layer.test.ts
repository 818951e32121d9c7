import { expect, test } from 'vitest';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import { seededRandom } from '../study/generator/random.ts';
import { drawCampaign } from '../study/verdict-campaigns.ts';

const campaign = (seed: string) => {
  const c = drawCampaign(seededRandom(seed), seed, { kind: 'glass', lags: 'right', replicates: 2 });
  return { ...c, input: { ...c.input, draws: 120 } };
};
const row = (r: ReturnType<typeof judgeCurvature>, quantity: string, method: string) =>
  r.parameters.find((p) => p.quantity === quantity && p.method === method);

test.each(['g1', 'g2', 'g3', 'g4'])('ξ within 0.05 and m within 5 of the generator’s law (%s)', (seed) => {
  const c = campaign(seed);
  const result = judgeCurvature(c.input);
  expect(Math.abs((row(result, 'decoupling_exponent', 'shared_law')?.value ?? 0) - (c.decoupling ?? 9))).toBeLessThan(
    0.05,
  );
  expect(Math.abs((row(result, 'fragility', 'moynihan')?.value ?? 0) - (c.former?.fragility ?? 999))).toBeLessThan(5);
  expect(Math.abs((row(result, 'fragility', 'viscosity')?.value ?? 0) - (c.former?.fragility ?? 999))).toBeLessThan(5);
  expect(result.events[0].sentences.join(' ')).toContain('if nuclei pre-exist');
});

test('without the cooling history no m is printed from Tg(β), and the flag says why', () => {
  const c = campaign('history');
  const result = judgeCurvature({
    ...c.input,
    facts: { ...c.input.facts, cooledAtHeatingRate: undefined, viscosity: undefined },
  });
  expect(row(result, 'fragility', 'moynihan')).toBeUndefined();
  expect(row(result, 'glass_transition_energy', 'moynihan')).toBeUndefined();
  expect(row(result, 'decoupling_exponent', 'shared_law')).toBeUndefined();
  expect(result.flags.map((f) => f.code)).toContain('glass-history');
});

test('without melting data ξ carries a flag', () => {
  const c = campaign('ignored');
  const { meltingEnthalpyJPerKg: _, ...facts } = c.input.facts;
  const result = judgeCurvature({ ...c.input, facts });
  expect(row(result, 'decoupling_exponent', 'shared_law')?.flags).toEqual(['driving-force-ignored']);
  expect(result.flags.map((f) => f.code)).toContain('driving-force-ignored');
});

test('stability numbers carry the rate they were read at', () => {
  const result = judgeCurvature(campaign('stability').input);
  const hruby = row(result, 'hruby', 'stability');
  expect(hruby?.rate_min_K_per_s).toBe(hruby?.rate_max_K_per_s);
  expect(hruby?.rate_min_K_per_s).toBeGreaterThan(0.1);
  expect(hruby?.rate_min_K_per_s).toBeLessThan(0.3);
});

test('plots: four laws beside the instruments’ points; growth against viscosity with slope −1; growth in m/s where anchored', () => {
  const c = campaign('plots');
  const facts = { ...c.input.facts, growthRateMPerS: 1e-6, growthTemperatureK: (c.lowK + c.highK) / 2 };
  const { plots } = judgeCurvature({ ...c.input, facts }).events[0];
  expect(plots.map((p) => p.kind)).toEqual(['kissinger', 'energy', 'growth', 'viscosity']);
  expect(plots[0].series).toHaveLength(2 + 4);
  const growth = plots[2];
  expect(growth.y.unit).toBe('m/s');
  const line = growth.series.find((s) => s.name === 'slope −1');
  expect(((line?.y[1] ?? 0) - (line?.y[0] ?? 0)) / ((line?.x[1] ?? 0) - (line?.x[0] ?? 0))).toBeCloseTo(-1, 9);
  for (const p of plots) for (const s of p.series) expect([...s.x, ...s.y].every(Number.isFinite)).toBe(true);
});
