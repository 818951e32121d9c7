import { readdir } from 'node:fs/promises';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { runCli, temporaryFolder } from './helpers.ts';

test('demo --once recovers the truth, finds every planted flaw, writes under data/demo only, and ends with 0', async () => {
  const folder = await temporaryFolder();
  const { code, out, err } = await runCli(['demo', '--once'], { RATESPAN_DATA: folder });
  expect(err).not.toContain('expected, but');
  expect(code).toBe(0);
  for (const sample of ['synthetic-ribbon', 'synthetic-excipient']) {
    for (const method of ['kissinger', 'friedman', 'vyazovkin', 'jmak']) {
      const line = out.split('\n').find((l) => l.startsWith(sample) && l.includes(`activation energy  ${method} `));
      expect(Number(/([+−])([\d.]+) %$/.exec(line ?? '')?.[2]), `${sample} ${method}`).toBeLessThan(2);
    }
  }
  expect(out.match(/ yes$/gm)).toHaveLength(5);
  expect(out).toMatch(/synthetic-film follows a bent law: its true local activation energy in kJ\/mol is \d+ at \d+ K/);
  expect(await readdir(folder)).toEqual(['demo']);
  expect((await readdir(join(folder, 'demo'))).sort()).toEqual(['campaign', 'store-1']);
}, 120_000);
