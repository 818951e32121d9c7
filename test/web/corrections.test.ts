import { expect, test } from 'vitest';
import type { ScanRow } from '../../web/client/rows.ts';
import { changesOf, formOf } from '../../web/model/correct-scan.ts';
import { identifyScans } from '../../web/model/scan-ids.ts';

test('only what is changed is sent; null takes a correction back', () => {
  const standing = { mass_mg: 8.2, limits_K: [400, 420] as [number, number] };
  const form = formOf(standing);
  expect(changesOf(form, standing)).toEqual({});
  expect(changesOf({ ...form, massMg: '' }, standing)).toEqual({ mass_mg: null });
  expect(changesOf({ ...form, exotherm: 'down', limitsK: [401, 420] }, standing)).toEqual({
    exotherm: 'down',
    limits_K: [401, 420],
  });
  expect(changesOf({ ...form, isExcluded: true, reason: ' spilt ' }, standing)).toEqual({ excluded: 'spilt' });
  const out = { excluded: 'spilt' };
  expect(changesOf({ ...formOf(out), isExcluded: false }, out)).toEqual({ excluded: null });
});

test('rows of one file find their scans by segment, also where a scan has two events', () => {
  const row = (file: string, segment: number | null, event: number | null) =>
    ({ file, segment, event, instrument: 'furnace' }) as ScanRow;
  const rows = [row('a', 3, 1), row('a', 1, 1), row('a', 1, 2), row('b', null, null)];
  const listed = ['a', 'a', 'b'].map((file, i) => ({
    id: `s${i}`,
    file,
    instrument: 'furnace',
    status: 'reduced' as const,
  }));
  const ids = identifyScans(rows, listed);
  expect(rows.map((r) => ids.get(r))).toEqual(['s1', 's0', 's0', 's2']);
});
