import { sql } from 'drizzle-orm';
import { expect, it } from 'vitest';
import { runBatch } from '../../jobs/store/fence.ts';
import { readTable, type TableFilter } from '../../jobs/store/index.ts';
import { replaceParameters } from '../../jobs/store/parameter-rows.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { forEachTest } from '../runner/each-test.ts';
import type { TestPorts } from '../runner/test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

const SAMPLES = [
  ['b', 1500],
  ['B', 700],
  ['ä', 2300],
  ['empty', 0],
  ['a', 1],
] as const;

const rowOf = (sample: string, value: number): ParameterRow => ({
  sample,
  event: 1,
  quantity: value % 2 ? 'activation_energy' : 'peak_temperature',
  method: 'trial',
  conversion: null,
  temperature_K: null,
  value,
  unit: 'K',
  lower95: null,
  upper95: null,
  scan_count: 3,
  rate_min_K_per_s: 0.1,
  rate_max_K_per_s: 1,
  flags: [],
  interval: 'student_t',
  variant: '',
});

it('reads a table that is larger than what is kept in memory at once, whole or from any position', async () => {
  for (const [sample, count] of SAMPLES) {
    const rows = Array.from({ length: count }, (_, i) => rowOf(sample, i));
    await ports.database.write((db) => runBatch(db, replaceParameters(db, campaign, sample, 'fit', rows)));
  }
  const read = async (filter: TableFilter = {}) => {
    const rows: unknown[] = [];
    for await (const row of readTable(ports, campaign, 'parameters', filter)) rows.push([row.sample, row.value]);
    return rows;
  };
  const { rows: expected } = (await ports.database.read.run(
    sql`select sample, value from parameters order by sample, position`,
  )) as unknown as { rows: { sample: string; value: number }[] };
  const all = expected.map(({ sample, value }) => [sample, value]);
  expect(all.length).toBe(4501);
  expect(await read()).toEqual(all);
  for (const offset of [0, 1, 699, 700, 701, 2199, 2200, 4500, 4501, 9999]) {
    expect(await read({ offset })).toEqual(all.slice(offset));
    expect(await read({ offset, limit: 3 })).toEqual(all.slice(offset, offset + 3));
  }
  const odd = all.filter(([, value]) => Number(value) % 2);
  expect(await read({ quantity: 'activation_energy', offset: 600, limit: 1100 })).toEqual(odd.slice(600, 1700));
  expect(await read({ sample: 'B', offset: 690 })).toEqual(all.filter(([sample]) => sample === 'B').slice(690));
});
