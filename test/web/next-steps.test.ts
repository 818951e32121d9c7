import { expect, test } from 'vitest';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { FlagRow } from '../../web/client/rows.ts';
import { consolidate, headlineEnergy, numbersBySample } from '../../web/model/headline.ts';
import { groupFlags, tellableNow } from '../../web/model/next-steps.ts';

const flagRow = (row: Partial<FlagRow>): FlagRow => ({
  severity: 'warn',
  code: 'event-cut',
  sample: null,
  instrument: null,
  file: null,
  event: null,
  detail: 'cut',
  action: 'scan further',
  ...row,
});

test('flags are grouped by code and action within their severity; a gap is not told twice', () => {
  const gaps = [{ sample: 'glass', code: 'few-rates', detail: 'two', action: 'run more' }];
  const groups = groupFlags(
    [
      flagRow({ file: 'a' }),
      flagRow({ file: 'b' }),
      flagRow({ code: 'spike', severity: 'note' }),
      flagRow({ code: 'few-rates', severity: 'stop', sample: 'glass' }),
      flagRow({ code: 'few-rates', severity: 'stop', sample: 'metal' }),
      flagRow({ action: 'something else' }),
    ],
    gaps,
  );
  expect(groups.warn.map((g) => g.flags.length)).toEqual([2, 1]);
  expect(groups.stop.flatMap((g) => g.flags.map((f) => f.sample))).toEqual(['metal']);
  expect(groups.note).toHaveLength(1);
});

const parameter = (row: Partial<ParameterRow>): ParameterRow => ({
  sample: 'glass',
  event: 1,
  quantity: 'activation_energy',
  method: 'kissinger',
  conversion: null,
  temperature_K: null,
  value: 200,
  unit: 'kJ/mol',
  lower95: 190,
  upper95: 210,
  scan_count: 8,
  rate_min_K_per_s: 0.03,
  rate_max_K_per_s: 1,
  flags: [],
  interval: 'monte_carlo',
  variant: '',
  ...row,
});

test('one number a method: pooled, Monte Carlo interval, no refits; the peak variant stands beside the pooled one', () => {
  const kept = consolidate([
    parameter({ interval: 'student_t', value: 1 }),
    parameter({ value: 2 }),
    parameter({ variant: 'without_outliers', value: 3 }),
    parameter({ method: 'friedman', conversion: 0.5, value: 4 }),
    parameter({ method: 'ozawa_flynn_wall', value: 5 }),
    parameter({ method: 'ozawa_flynn_wall', variant: 'peak', value: 6 }),
    parameter({ method: 'boswell', interval: 'student_t', value: 7 }),
  ]);
  expect(kept.map((row) => row.value)).toEqual([2, 5, 6, 7]);
});

test('events come in order, and the headline is Vyazovkin where there is one', () => {
  const events = numbersBySample([
    parameter({ event: 2 }),
    parameter({}),
    parameter({ method: 'vyazovkin', value: 205 }),
    parameter({ quantity: 'avrami_exponent', method: 'jmak', unit: '1', value: 3 }),
  ]).get('glass');
  expect(events?.map((e) => e.event)).toEqual([1, 2]);
  expect(events?.map((e) => headlineEnergy(e)?.value)).toEqual([205, 200]);
  expect(events?.[0].exponents).toHaveLength(1);
});

test('what is missing is told only where no scan is still coming in', () => {
  const status: CampaignStatus = {
    settled: false,
    scans: { received: 1, read: 0, reduced: 3, set_aside: 0, failed: 0, unassigned: 0, excluded: 0, superseded: 0 },
    samples: [
      { sample: 'glass', state: 'waiting' },
      { sample: 'metal', state: 'fitted' },
    ],
    jobs: { queued: 1, running: 0, failed: 0, oldest_age_s: null },
    eta_s: null,
  };
  const gaps = ['glass', 'metal', ''].map((sample) => ({ sample, code: 'few-rates', detail: '', action: '' }));
  const flags = [{ code: 'file-missing' }, { code: 'spike' }];
  expect(tellableNow(flags, gaps, status)).toEqual({ flags: [flags[1]], gaps: [gaps[1]] });
  expect(tellableNow(flags, gaps, { ...status, settled: true })).toEqual({ flags, gaps });
});
