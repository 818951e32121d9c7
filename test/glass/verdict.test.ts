import { describe, expect, test } from 'vitest';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import { VERDICT_COLUMNS } from '../../schema/wire/result-tables.ts';
import { seededRandom } from '../study/generator/random.ts';
import { isFalse, runCampaign, truthOf } from '../study/verdict.ts';
import { type CampaignWish, drawCampaign } from '../study/verdict-campaigns.ts';

const SEEDS = Array.from({ length: 5 }, (_, k) => `test-${k}`);
const draw = (seed: string, wish: CampaignWish) => {
  const c = drawCampaign(seededRandom(seed), seed, wish);
  // Fewer draws than in the product: the verdict itself hardly moves.
  return { ...c, input: { ...c.input, draws: 120 } };
};

describe('what must never happen', () => {
  test.each(SEEDS)(
    'a straight material with a five-fold lag unreported on the fast instrument is not called material (%s)',
    (seed) => {
      const c = draw(seed, { kind: 'straight', lags: 'wrong', lagFactor: 5, replicates: 2 });
      expect(judgeCurvature(c.input).verdicts[0].verdict).not.toBe('material');
    },
  );
  test.each(SEEDS)('a fragile material with a perfect instrument is not called instrument (%s)', (seed) => {
    const c = draw(seed, { kind: 'glass', fragility: 100, lags: 'right', replicates: 2 });
    expect(judgeCurvature(c.input).verdicts[0].verdict).toBe('material');
  });
});

describe('a small version of the study', () => {
  const runs = SEEDS.map((seed) => runCampaign(`${seed}-s`));
  test('no verdict is false', () => {
    expect(runs.filter((r) => isFalse(truthOf(r.campaign), r.verdict)).map((r) => r.campaign.input.seed)).toEqual([]);
  });
  test('E at both ends of a decided straight or bent material is within 10 %', () => {
    for (const { campaign, result, verdict } of runs) {
      if (verdict === 'undecided' || campaign.kind === 'glass') continue;
      const rows = result.parameters.filter((p) => p.quantity === 'local_activation_energy');
      for (const row of [rows[0], rows[rows.length - 1]]) {
        const truth = campaign.law.localEnergy(row.temperature_K ?? Number.NaN) / 1e3;
        expect(Math.abs(row.value / truth - 1)).toBeLessThan(0.1);
      }
    }
  });
});

test('the order of scans and instruments does not matter, and the row has the columns of verdicts.csv', () => {
  const { input } = draw('order', { kind: 'bent', bend: 0.6, replicates: 2 });
  const a = judgeCurvature(input);
  const b = judgeCurvature({
    ...input,
    scans: [...input.scans].reverse(),
    instruments: [...input.instruments].reverse(),
  });
  expect(b).toEqual(a);
  expect(Object.keys(a.verdicts[0])).toEqual([...VERDICT_COLUMNS]);
});

test('a lag on the chip is named with its size', () => {
  const { input, netLagS } = draw('named', {
    kind: 'straight',
    lags: 'unknown',
    replicates: 3,
    scatter: 0.3,
    noise: 0.003,
  });
  const { events, flags } = judgeCurvature(input);
  expect(events[0].row.verdict).toBe('instrument');
  const chip = events[0].lags.find((l) => l.instrument === 'chip-1');
  expect(chip?.beyondCalibration).toBe(true);
  expect(Math.abs((chip?.lagS ?? 0) / netLagS[1] - 1)).toBeLessThan(0.25);
  expect(events[0].sentences.join(' ')).toContain('comes from the instrument');
  expect(flags.map((f) => f.code)).toContain('lag-beyond-calibration');
});

test('a file corrected before it came has a negative lag', () => {
  const { input } = draw('negative', { kind: 'straight', lags: 'negative', replicates: 3, scatter: 0.3, noise: 0.003 });
  const { verdicts, flags } = judgeCurvature(input);
  expect(verdicts[0].verdict).toBe('instrument');
  expect(flags.filter((f) => f.code === 'lag-negative').length).toBeGreaterThan(0);
});

describe('too little to go on', () => {
  test('five scans of one instrument: undecided, with how many more', () => {
    const { input } = draw('few', { kind: 'bent', bend: 1, instruments: 'furnace', replicates: 1 });
    const { events, flags } = judgeCurvature(input);
    expect(events[0].row.verdict).toBe('undecided');
    expect(events[0].reason).toBe('too-few-scans');
    // 5 scans − (3 of the law + 1 lag) leave 1 degree of freedom; 3 are needed.
    expect(events[0].row.decides_next).toContain('2 more scans');
    expect(flags.map((f) => f.code)).toContain('too-few-scans');
  });
  test('two decades on a furnace cannot tell a small bend from a lag: undecided, and what would settle it', () => {
    const { input } = draw('short', { kind: 'straight', instruments: 'furnace', replicates: 2 });
    const { events, sharedLaws } = judgeCurvature(input);
    expect(events[0].row.verdict).toBe('undecided');
    expect(events[0].deciding.length).toBeGreaterThan(0);
    expect(events[0].halfWidthExpected ?? 9).toBeLessThan(events[0].halfWidthNow ?? 0);
    expect(sharedLaws[0].draws.bend).toHaveLength(120);
  });
  test('peaks without curves and a lag that is large against the width: no material', () => {
    const { input } = draw('peaks', { kind: 'bent', bend: 1.2, lags: 'unknown', replicates: 3 });
    const scans = input.scans.map((s) => ({ ...s, event: { ...s.event, curve: undefined, centroidK: Number.NaN } }));
    const { events } = judgeCurvature({ ...input, scans });
    expect(events[0].opinion).toBe('peak');
    expect([events[0].row.verdict, events[0].reason]).toEqual(['undecided', 'peaks-only']);
  });
  test('scans whose peak lies below the glass transition stay out and are told', () => {
    const { input } = draw('below', { kind: 'straight', replicates: 1 });
    const [low] = [...input.scans].sort((a, b) => a.event.peakK - b.event.peakK);
    const { flags, verdicts } = judgeCurvature({ ...input, facts: { glassTransitionK: low.event.peakK + 1 } });
    expect(flags.filter((f) => f.code === 'crystallises-from-glass').map((f) => f.file)).toContain(low.file);
    expect(verdicts[0].rate_min_K_per_s).toBeGreaterThan(low.event.rateKPerS);
  });
  test('no heating scan: no verdict', () => {
    const { input } = draw('none', { kind: 'straight', replicates: 1 });
    const scans = input.scans.map((s) => ({ ...s, event: { ...s.event, kind: 'hold' as const } }));
    expect(judgeCurvature({ ...input, scans }).verdicts).toEqual([]);
  });
});

test('another state on the chip is told', () => {
  const { input } = draw('state', {
    kind: 'straight',
    lags: 'right',
    bridged: true,
    replicates: 3,
    scatter: 0.4,
    noise: 0.003,
  });
  // Ten times the nuclei: ln K of the chip's sample higher by ln 10/3, every temperature lower by that × R T²/E, as the width goes.
  const scans = input.scans.map((s) => {
    if (s.instrument !== 'chip-1') return s;
    const shift = (-Math.log(10) * s.event.widthK) / 2.446;
    const curve = s.event.curve && { ...s.event.curve, temperatureK: s.event.curve.temperatureK.map((T) => T + shift) };
    return { ...s, event: { ...s.event, curve, centroidK: s.event.centroidK + shift, peakK: s.event.peakK + shift } };
  });
  const { events, flags } = judgeCurvature({ ...input, scans });
  expect(flags.map((f) => f.code)).toContain('state-differs');
  expect(events[0].row.verdict).not.toBe('material');
});

test('a shared law with n and draws that spread about it', () => {
  const c = draw('shared', { kind: 'bent', bend: 0.8, lags: 'right', replicates: 3 });
  const [{ law, draws }] = judgeCurvature(c.input).sharedLaws;
  expect(Math.abs(law.avramiExponent / c.exponent - 1)).toBeLessThan(0.05);
  // B of the law between the true limits of temperature, against the generator's law
  const u = (T: number) => (1 / T - law.x0PerK) / law.dxPerK;
  const bend = law.bend * (u(c.lowK) - u(c.highK));
  expect(Math.abs(bend - c.trueBend)).toBeLessThan(0.15);
  const mean = draws.bend.reduce((s, v) => s + v, 0) / draws.bend.length;
  expect(Math.abs(mean - law.bend)).toBeLessThan(0.05);
  expect(new Set(draws.energyJPerMol).size).toBeGreaterThan(100);
});
