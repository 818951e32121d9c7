import { readdirSync, readFileSync } from 'node:fs';
import { basename, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';
import { OPERATIONS } from '../../api/client-types.ts';
import { PROBLEMS } from '../../api/problems.ts';
import { EXIT } from '../../jobs/cli/exit.ts';
import { generalHelp, VERBS, type VerbName } from '../../jobs/cli/help.ts';
import { STEP_VERSIONS } from '../../jobs/steps/settings.ts';
import { FLAG_CODES } from '../../schema/wire/flags.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { STUDIES } from '../study/registry.ts';

// What a document names exists, and what exists is named: routes, verbs, options, exit codes, variables, columns, codes, studies, scripts, files.
const root = fileURLToPath(new URL('../..', import.meta.url));
const read = (path: string): string => readFileSync(join(root, path), 'utf8');
const readme = read('README.md');
const developers = read('DEVELOPERS.md');
const sorted = (values: Iterable<string>): string[] => [...new Set(values)].sort();

const filesOf = (rooms: readonly string[]) =>
  rooms.flatMap((room) =>
    readdirSync(join(root, room), { recursive: true, encoding: 'utf8' })
      .filter((file) => /\.tsx?$/.test(file))
      .map((file) => join(room, file)),
  );
const sources = filesOf(['api', 'jobs', 'schema', 'web']);

/** Rows of the table under a header that starts with these cells: first cells only. */
function firstCells(text: string, header: string): string[] {
  const lines = text.split('\n');
  const at = lines.findIndex((line) => line.startsWith(header));
  expect(at, header).toBeGreaterThan(-1);
  const rows = lines.slice(at + 2);
  return rows
    .slice(
      0,
      rows.findIndex((line) => !line.startsWith('|')),
    )
    .map((line) => line.split(/(?<!\\)\|/)[1]);
}

describe('command line', () => {
  const rows = firstCells(readme, '| verb | does |');
  test('README names every verb with all of its options, and no other', () => {
    const named = new Map<string, Set<string>>();
    for (const [, code] of rows.flatMap((row) => [...row.matchAll(/`([^`]+)`/g)])) {
      const verb = code.split(' ')[0];
      const options = named.get(verb) ?? new Set<string>();
      for (const [, option] of code.matchAll(/--([a-z]+)/g)) options.add(option);
      named.set(verb, options);
    }
    expect(sorted(named.keys())).toEqual(sorted(Object.keys(VERBS)));
    for (const verb of Object.keys(VERBS) as VerbName[])
      expect([verb, sorted(named.get(verb)!)]).toEqual([verb, sorted(Object.keys(VERBS[verb].options))]);
  });
  test('README and help list every exit code, and no other', () => {
    const wanted = Object.values(EXIT).map(String);
    const [, line] = /Exit codes: (.*)/.exec(readme) ?? [];
    expect(line.split(' · ').map((part) => part.split(' ')[0])).toEqual(wanted);
    for (const code of wanted) expect(generalHelp()).toMatch(new RegExp(`\\b${code} [a-z]`));
  });
  test('README, help and code know the same environment variables', () => {
    const inCode = sorted(
      sources.flatMap((file) => [...read(file).matchAll(/process\.env\.(\w+)/g)].map(([, name]) => name)),
    );
    const ours = inCode.filter((name) => name.startsWith('RATESPAN_'));
    // Not ours, but read: said in the same line.
    expect(inCode.filter((name) => !ours.includes(name))).toEqual(inCode.includes('NO_COLOR') ? ['NO_COLOR'] : []);
    for (const text of [readme, generalHelp()])
      expect(sorted([...text.matchAll(/\bRATESPAN_[A-Z_]+/g)].map(([name]) => name))).toEqual(ours);
  });
  test('DEVELOPERS and the tests know the same environment variables', () => {
    const inTests = filesOf(['test']).flatMap((file) =>
      [...read(file).matchAll(/process\.env\.([A-Z_]+)/g)].map(([, name]) => name),
    );
    const named = [...developers.matchAll(/`([A-Z_]+)=/g)].map(([, name]) => name);
    // The search path is the system's.
    expect(sorted(named)).toEqual(sorted(inTests.filter((name) => name !== 'PATH')));
  });
});

/** `GET/PATCH /v1/a/:id` · `…/b` and `/v1/a/{b,c}` written out: method and path of the document. */
function routesOf(cell: string): string[] {
  let base = '';
  return [...cell.matchAll(/`([^`]+)`/g)].flatMap(([, code]) => {
    const [, methods = 'GET', written] = /^(?:([A-Z/]+) )?((?:\/|…)[^? ]*)/.exec(code) ?? [];
    if (written === undefined) return [];
    const path = written.startsWith('…') ? `${base}${written.slice(1)}` : written;
    if (!written.startsWith('…')) base = /^(.*\/:id)/.exec(path)?.[1] ?? path;
    const [, before, list, after] = /^(.*)\{(.*)\}(.*)$/.exec(path) ?? [];
    const paths = list === undefined ? [path] : list.split(',').map((one) => `${before}${one}${after}`);
    return methods.split('/').flatMap((method) => paths.map((one) => `${method} ${one.replace(':id', '{id}')}`));
  });
}

test('README lists every route, and no other', () => {
  const documents = ['GET /v1/openapi.json', 'GET /v1/reference'];
  const named = firstCells(readme, '| route | does |').flatMap(routesOf);
  const existing = Object.values(OPERATIONS).map(([method, route]) => `${method} ${route}`);
  expect(sorted([...named, ...documents])).toEqual(sorted(existing));
  for (const document of documents) expect(readme).toContain(`\`${document.split(' ')[1]}\``);
});

test('README names every result file', () => {
  const [section] = /## What comes out[\s\S]*?###/.exec(readme) ?? [''];
  const named = [...section.matchAll(/`([a-z]+)\.csv`/g)].map(([, name]) => name);
  expect(sorted(named)).toEqual(sorted(Object.keys(RESULT_TABLES)));
});

test('README has every column of every sheet, and no other', () => {
  const files = { scan: 'scans.csv', instrument: 'instruments.csv', sample: 'samples.csv', peak: 'peaks.csv' };
  const more = { viscosity: 'viscosity.csv', goal: 'goal.csv', programme: 'programs/*.csv' };
  const code = read('jobs/instrument/sheets.ts') + read('jobs/instrument/further-sheets.ts');
  for (const [table, file] of Object.entries({ ...files, ...more })) {
    const [, body] = new RegExp(`${table.toUpperCase()}_COLUMNS[^=]*= \\[([\\s\\S]*?)\\n\\];`).exec(code) ?? [];
    const columns = [...body.matchAll(/name: '([^']+)'/g)].map(([, name]) => name);
    const row = readme.split('\n').find((line) => line.startsWith(`| \`${file}\` |`))!;
    const written = row
      .split('|')[2]
      .replace(/^[^:]*: /, '')
      .split(/,(?![^([]*[)\]])/)
      .map((cell) =>
        cell
          .replace(/\*\*|\[.*\]|\(.*\)|;.*/g, '')
          .replace(/ or $/, '')
          .trim(),
      );
    expect([file, sorted(written)]).toEqual([file, sorted(columns)]);
  }
});

test('every code that README or DEVELOPERS names exists', () => {
  const scripts = Object.keys(JSON.parse(read('package.json')).scripts);
  const known = new Set<string>([
    ...Object.keys(FLAG_CODES),
    ...Object.keys(PROBLEMS),
    ...Object.keys(STEP_VERSIONS),
    ...Object.keys(STUDIES),
    ...sources.map((file) => basename(file).replace(/\.tsx?$/, '')),
    ...sources.flatMap((file) => file.split('/')),
    ...scripts,
  ]);
  const steps = ['assign-scans', 'read-sheet', 'unpack-archive', 'plan-campaign'];
  for (const text of [readme, developers]) {
    const codes = [...text.matchAll(/`([a-z]+(?:-[a-z]+)+)`/g)].map(([, code]) => code);
    expect(sorted(codes).filter((code) => !known.has(code) && !steps.includes(code))).toEqual([]);
    const studies = [...text.matchAll(/npm run study -- ([a-z-]+)/g)].map(([, name]) => name);
    expect(studies.filter((name) => !(name in STUDIES))).toEqual([]);
    const run = [...text.matchAll(/npm run (?:--silent )?([a-z:-]+)/g)].map(([, name]) => name);
    expect(run.filter((name) => !scripts.includes(name))).toEqual([]);
  }
});

test('links and pictures of the documents lead to files', () => {
  for (const text of [readme, developers])
    for (const [, path] of text.matchAll(/\]\((?!https?:|#)([^)#]+)\)/g))
      expect(read(path).length, path).toBeGreaterThan(0);
});
