import { writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import { runHere, temporaryFolder, tinyCampaign, writeTree } from './helpers.ts';

test('forecast answers from the stored fit, and says what it cannot take', async () => {
  const folder = await temporaryFolder();
  const [input, out] = [join(folder, 'tiny'), join(folder, 'results')];
  await writeTree(input, tinyCampaign());
  expect((await runHere(['run', input, '--out', out, '--workers', '0', '--quiet'])).code).toBe(0);
  const db = ['--db', join(out, 'ratespan.db')];
  const sample = ['--sample', 'glass'];
  const ask = (...rest: string[]) => runHere(['forecast', 'tiny', ...sample, ...rest, ...db]);

  const told = await ask('--temperature', '240', '--conversion', '0.5');
  expect([told.code, told.err]).toEqual([0, '']);
  expect(told.out).toMatch(/^event 1, (shared law|model-free): At least /);
  expect(told.out.trimEnd().endsWith(FORECAST_CAUTION)).toBe(true);

  const program = join(folder, 'ramp.csv');
  await writeFile(program, 'time [min],temperature [°C]\n0,20\n60,400\n');
  const rows = JSON.parse((await ask('--program', program, '--json')).out);
  expect(rows.caution).toBe(FORECAST_CAUTION);
  expect(rows.items[0]).toMatchObject({ question: 'conversion_at_end', program: 'ramp.csv', unit: '1' });
  // 380 K at 6.3 K/min, past every peak of the data: all has crystallised.
  expect(rows.items[0].value).toBeGreaterThan(0.9);

  for (const [args, words] of [
    [['--temperature', '240'], 'make a question'],
    [['--temperature', '240', '--conversion', '1.5'], '--conversion takes'],
    [['--program', program, '--time', '5'], '--program goes alone'],
    [['--program', join(folder, 'none.csv')], 'cannot read the programme'],
  ] as const) {
    const refused = await ask(...args);
    expect(refused.code).toBe(2);
    expect(refused.err).toContain(words);
  }
  const unknown = await runHere([
    'forecast',
    'tiny',
    '--sample',
    'nobody',
    '--time',
    '5',
    '--conversion',
    '0.1',
    ...db,
  ]);
  expect([unknown.code, unknown.err]).toEqual([2, expect.stringContaining('there is no sample "nobody"')]);
});
