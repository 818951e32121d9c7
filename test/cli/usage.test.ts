import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { parseVerbArguments, wholeNumber } from '../../jobs/cli/arguments.ts';
import { UsageError } from '../../jobs/cli/exit.ts';
import { generalHelp, VERBS, type VerbName, verbHelp } from '../../jobs/cli/help.ts';
import { progressBar } from '../../jobs/cli/terminal.ts';
import { runCli, runHere, temporaryFolder, writeTree } from './helpers.ts';

describe('arguments', () => {
  test.each<[VerbName, string[], string]>([
    ['run', [], 'run: FOLDER is missing; see: ratespan run --help'],
    ['run', ['a', 'b'], 'run: "b" is one argument too many; see: ratespan run --help'],
    ['serve', ['--bogus'], "serve: Unknown option '--bogus'; see: ratespan serve --help"],
    ['run', ['a', '--out'], "run: Option '--out <value>' argument missing; see: ratespan run --help"],
  ])('%s %j is refused in one sentence', (verb, args, message) => {
    expect(() => parseVerbArguments(verb, args)).toThrow(new UsageError(message));
  });

  test('numbers are whole and within their range', () => {
    expect(wholeNumber('serve', 'port', '0', [0, 65535])).toBe(0);
    expect(wholeNumber('serve', 'port', undefined, [0, 65535])).toBeUndefined();
    for (const bad of ['-1', '1.5', '65536', 'x', '', '0x10']) {
      expect(() => wholeNumber('serve', 'port', bad, [0, 65535])).toThrow('whole number from 0 to 65535');
    }
  });

  test('help names every verb and every option, in lines that fit a terminal', () => {
    for (const verb of Object.keys(VERBS) as VerbName[]) {
      expect(generalHelp()).toContain(`  ${verb} `);
      for (const option of Object.keys(VERBS[verb].options)) expect(verbHelp(verb)).toContain(`  --${option}`);
      for (const line of `${generalHelp()}${verbHelp(verb)}`.split('\n')) expect(line.length).toBeLessThanOrEqual(100);
    }
  });
});

describe('exit codes', () => {
  test('wrong usage is 2 with one sentence, help is 0, an unreachable server is 4', async () => {
    const folder = await temporaryFolder();
    await writeTree(folder, { 'a.txt': 'x' });
    const [bogus, help, missing, unreachable] = await Promise.all([
      runCli(['bogus']),
      runHere(['run', '--help']),
      runHere(['run', join(folder, 'nowhere'), '--out', join(folder, 'out')]),
      runHere(['send', folder, '--campaign', 'c', '--to', 'http://127.0.0.1:1']),
    ]);
    expect([bogus.code, bogus.out]).toEqual([2, '']);
    expect(bogus.err).toBe(
      'ratespan: unknown verb "bogus"; known: serve, work, run, send, table, forecast, token, backup, restore, demo; see: ratespan --help\n',
    );
    expect([help.code, help.out]).toEqual([0, verbHelp('run')]);
    expect(missing.code).toBe(2);
    expect(missing.err).toMatch(/^ratespan: cannot read the folder .*nowhere: there is no such folder\n$/);
    expect(unreachable.code).toBe(4);
    expect(unreachable.err).toMatch(/^ratespan: cannot reach http:\/\/127\.0\.0\.1:1: /);
  });
});

describe('progress', () => {
  test('a bar says how much is done and, where known, how long it takes', () => {
    expect(progressBar(6, 24, 'scans')).toBe('[######..................] 6/24 scans');
    expect(progressBar(0, 0, 'scans', null)).toBe('[........................] 0/0 scans');
    expect(progressBar(24, 24, 'scans', 0)).toBe(`[${'#'.repeat(24)}] 24/24 scans`);
    expect(progressBar(12, 24, 'files', 41.2)).toMatch(/ 12\/24 files, 42 s left$/);
    expect(progressBar(12, 24, 'files', 301)).toMatch(/ 12\/24 files, 6 min left$/);
  });
  test('nothing is coloured, so NO_COLOR holds by itself', async () => {
    const { readFile, readdir } = await import('node:fs/promises');
    const room = join(import.meta.dirname, '../../jobs/cli');
    const files = (await readdir(room, { recursive: true })).filter((file) => file.endsWith('.ts'));
    for (const file of files)
      expect(await readFile(join(room, file), 'utf8')).not.toMatch(/\\u001b\[\d+(;\d+)*m|\\x1b/);
    expect(files.length).toBeGreaterThan(20);
  });
});
