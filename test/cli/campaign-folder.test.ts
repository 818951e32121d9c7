import { mkdir, symlink } from 'node:fs/promises';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { hashFile, listCampaignFolder } from '../../jobs/cli/campaign-folder.ts';
import { UsageError } from '../../jobs/cli/exit.ts';
import { temporaryFolder, writeTree } from './helpers.ts';

test('sheets come first, then files by path; names are NFC; what is not read is said', async () => {
  const folder = await temporaryFolder();
  await writeTree(folder, {
    'b/oven/2.txt': '22',
    'b/oven/10.txt': '',
    'a/oven/re\u0301sultat.txt': 'x',
    'scans.csv': 's',
    'samples.csv': 's',
    'b/scans.csv': 'a data file: sheets stand at the root',
    '.hidden': 'h',
    'old-results/run.json': '{}',
    'old-results/scans.csv': 's',
    'out/ratespan.db': 'd',
  });
  await symlink(folder, join(folder, 'loop'));
  const { files, skipped } = await listCampaignFolder(folder, [join(folder, 'out')]);
  expect(files.map((f) => f.path)).toEqual([
    'samples.csv',
    'scans.csv',
    'a/oven/r\u00e9sultat.txt',
    'b/oven/10.txt',
    'b/oven/2.txt',
    'b/scans.csv',
  ]);
  expect(files.find((f) => f.path === 'b/oven/2.txt')?.bytes).toBe(2);
  expect(skipped).toEqual([
    '.hidden is hidden',
    'loop is a linked folder',
    'old-results/ holds a run.json and is taken for results',
  ]);
});

test('of a file and its gzipped namesake the plain one counts, and both are named', async () => {
  const folder = await temporaryFolder();
  await writeTree(folder, { 'a/1.txt': 'x', 'a/1.txt.gz': 'other', 'a/2.txt.gz': 'alone' });
  const { files, skipped } = await listCampaignFolder(folder);
  expect(files.map((f) => f.path)).toEqual(['a/1.txt', 'a/2.txt.gz']);
  expect(skipped).toEqual(['a/1.txt.gz unpacks to a/1.txt, which is there too and counts']);
});

test('a folder that is none is a UsageError', async () => {
  const folder = await temporaryFolder();
  await writeTree(folder, { file: 'x' });
  await mkdir(join(folder, 'empty'));
  await expect(listCampaignFolder(join(folder, 'none'))).rejects.toThrow(UsageError);
  await expect(listCampaignFolder(join(folder, 'file'))).rejects.toThrow('it is not a folder');
  expect((await listCampaignFolder(join(folder, 'empty'))).files).toEqual([]);
});

test('files are hashed by SHA-256', async () => {
  const folder = await temporaryFolder();
  await writeTree(folder, { abc: 'abc' });
  // FIPS 180-4, the example message "abc".
  expect(await hashFile(join(folder, 'abc'))).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
});
