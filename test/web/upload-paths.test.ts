import { describe, expect, test } from 'vitest';
import { outerFolder, planUpload } from '../../web/upload/paths.ts';

describe('the folder around a campaign', () => {
  test('is left out when sheets lie at its root', () => {
    expect(outerFolder(['run 7/scans.csv', 'run 7/a.txt'])).toBe('run 7');
  });
  test('is left out when it holds SAMPLE/INSTRUMENT/file', () => {
    expect(outerFolder(['run 7/glass/oven/a.txt', 'run 7/glass/chip/b.txt'])).toBe('run 7');
  });
  test('is kept when it is a sample itself', () => {
    expect(outerFolder(['glass/oven/a.txt', 'glass/chip/b.txt'])).toBeUndefined();
  });
  test('is kept when two folders were given, or loose files', () => {
    expect(outerFolder(['a/scans.csv', 'b/c/d/e.txt'])).toBeUndefined();
    expect(outerFolder(['scans.csv', 'a.txt'])).toBeUndefined();
    expect(outerFolder([])).toBeUndefined();
  });
});

test('sheets go first, hidden files are left out with a reason, names are composed (NFC)', () => {
  const planned = planUpload([
    { path: 'run/z.txt' },
    { path: 'run/.DS_Store' },
    { path: 'run/Scans.CSV' },
    { path: 'run/gla\u0308s/a.txt' },
  ]);
  expect(planned.map((p) => p.path)).toEqual(['Scans.CSV', '.DS_Store', 'gl\u00e4s/a.txt', 'z.txt']);
  expect(planned.filter((p) => p.leftOut).map((p) => p.path)).toEqual(['.DS_Store']);
});
