import { expect, it } from 'vitest';
import {
  archiveKind,
  assignmentFromPath,
  isProgram,
  pathProblem,
  sheetKind,
  unpackedPath,
} from '../../jobs/instrument/index.ts';

it('knows sheets by their name at the root, and programmes by their folder', () => {
  expect(
    ['scans.csv', 'Instruments.CSV', 'samples.csv', 'peaks.csv', 'viscosity.csv', 'goal.csv'].map(sheetKind),
  ).toEqual(['scans', 'instruments', 'samples', 'peaks', 'viscosity', 'goal']);
  expect(['a/scans.csv', 'scans.csv.gz', 'my scans.csv', 'scans.txt'].map(sheetKind)).toEqual([
    undefined,
    undefined,
    undefined,
    undefined,
  ]);
  expect(['programs/oven.csv', 'programs/a/b.csv', 'a/programs/b.csv', 'programs/a.txt'].map(isProgram)).toEqual([
    true,
    false,
    false,
    false,
  ]);
});

it('knows archives by their ending', () => {
  expect(['a.zip', 'A.ZIP', 'a.txt.gz', 'a.zip/b.txt', '.zip', 'a/.gz'].map(archiveKind)).toEqual([
    'zip',
    'zip',
    'gzip',
    undefined,
    undefined,
    undefined,
  ]);
  expect([unpackedPath('a/x.txt.gz'), unpackedPath('a/x.txt')]).toEqual(['a/x.txt', 'a/x.txt']);
});

it('assigns by SAMPLE/INSTRUMENT/file, an archive counting as the folder it stands in', () => {
  const assigned = { sample: 'S', instrument: 'I' };
  for (const path of ['S/I/a.txt', 'all.zip/S/I/a.txt', 'S/I/some.zip/a.txt', 'S/I/a.zip'])
    expect(assignmentFromPath(path)).toEqual(assigned);
  for (const path of ['a.txt', 'I/a.txt', 'x/S/I/a.txt', 'some.zip/a.txt'])
    expect(assignmentFromPath(path)).toBeUndefined();
});

it('takes only safe paths', () => {
  for (const path of [
    'a',
    'S/I/a.txt',
    'Prüfling 1/Gerät/µ.txt',
    `${'ü'.repeat(256)}`,
    'a..b/c',
    'archive.zip/inner/path',
  ])
    expect([path, pathProblem(path)]).toEqual([path, undefined]);
  for (const path of [
    '',
    '/a',
    'a/',
    'a//b',
    '.',
    '..',
    'a/../b',
    './a',
    'a\\b',
    'a\nb',
    'a\u0085b',
    'u\u0308',
    '=a',
    'a/+b',
    '-a',
    '@a',
    `${'ü'.repeat(257)}`,
    '\ud800',
  ])
    expect(pathProblem(path), JSON.stringify(path)).toMatch(/^(is|has|holds|starts) /);
});
