import { readdirSync, readFileSync, statSync } from 'node:fs';
import { dirname, join, relative } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';

const root = fileURLToPath(new URL('../..', import.meta.url));

function sources(folder: string): string[] {
  const out: string[] = [];
  for (const name of readdirSync(join(root, folder))) {
    const path = join(folder, name);
    if (statSync(join(root, path)).isDirectory()) out.push(...sources(path));
    else if (/\.tsx?$/.test(name)) out.push(path);
  }
  return out;
}

/**
 * Which rooms a room may name: the project's one-way flow as data (DEVELOPERS.md shows the same table). A room always sees itself.
 */
const CORE = ['schema/wire', 'jobs/numeric', 'jobs/laws', 'jobs/simulate'];
const PIPELINE = ['schema/wire', 'schema/tables', 'jobs/ports'];
const MAY_IMPORT: Record<string, string[]> = {
  'schema/wire': [],
  'schema/tables': ['schema/wire'],
  'jobs/numeric': ['schema/wire'],
  'jobs/laws': ['schema/wire', 'jobs/numeric'],
  'jobs/simulate': ['schema/wire', 'jobs/numeric', 'jobs/laws'],
  'jobs/instrument': ['schema/wire', 'jobs/numeric'],
  'jobs/calibration': [...CORE, 'jobs/instrument'],
  'jobs/reduction': [...CORE, 'jobs/instrument', 'jobs/calibration'],
  'jobs/kinetics': [...CORE, 'jobs/reduction'],
  'jobs/glass': [...CORE, 'jobs/kinetics'],
  'jobs/forecast': [...CORE, 'jobs/kinetics', 'jobs/glass'],
  'jobs/campaign': [...CORE, 'jobs/kinetics', 'jobs/glass', 'jobs/forecast'],
  'jobs/ports': ['schema/wire'],
  'jobs/store': PIPELINE,
  'jobs/steps': [
    ...PIPELINE,
    'jobs/store',
    'jobs/instrument',
    'jobs/calibration',
    'jobs/reduction',
    'jobs/kinetics',
    'jobs/glass',
    'jobs/forecast',
    'jobs/campaign',
  ],
  'jobs/runner': ['schema/wire', 'jobs/ports', 'jobs/store', 'jobs/steps'],
  'jobs/adapters': [...PIPELINE, 'jobs/instrument', 'jobs/reduction', 'jobs/kinetics', 'jobs/glass', 'jobs/campaign'],
  // Entry points wire everything up.
  'jobs/cli': ['*'],
  api: ['schema/wire', 'jobs/ports', 'jobs/store', 'jobs/steps', 'web/report'],
  web: ['schema/wire', 'api/client-types'],
};
/** Entry points of the API, which may name the runner and the adapters too. */
const ENTRY_POINTS = ['api/node.ts', 'api/worker.ts'];
const CORE_ROOMS = [
  'numeric',
  'laws',
  'simulate',
  'instrument',
  'calibration',
  'reduction',
  'kinetics',
  'glass',
  'forecast',
  'campaign',
].map((r) => `jobs/${r}`);

const all = ['schema/wire', 'schema/tables', 'jobs', 'api', 'web'].flatMap(sources);
const roomOf = (path: string): string =>
  Object.keys(MAY_IMPORT)
    .filter((r) => path === r || path.startsWith(`${r}/`))
    .sort((a, b) => b.length - a.length)[0];

interface Import {
  from: string;
  target: string;
  line: string;
}
const imports: Import[] = all.flatMap((from) =>
  [
    ...readFileSync(join(root, from), 'utf8').matchAll(
      /(?:^|\n)\s*(?:import|export)[^;'"]*?from\s+'([^']+)'|import\('([^']+)'\)/g,
    ),
  ].map((m) => {
    const name = m[1] ?? m[2];
    const target = name.startsWith('.') ? relative(root, join(root, dirname(from), name)) : name;
    return { from, target, line: m[0].trim().split('\n').pop() ?? '' };
  }),
);

describe('imports run one way', () => {
  test('every source lies in a room of the table', () => {
    expect(all.filter((f) => !roomOf(f))).toEqual([]);
    expect(all.length).toBeGreaterThan(60);
  });
  test('no room names a room that the table does not allow', () => {
    const wrong = imports
      .filter((i) => roomOf(i.target) && !i.target.startsWith('node_modules'))
      .filter((i) => {
        const [from, to] = [roomOf(i.from), roomOf(i.target)];
        if (from === to || MAY_IMPORT[from].includes('*')) return false;
        if (ENTRY_POINTS.includes(i.from)) return !/^(api|jobs\/(ports|runner|adapters|store)|schema)/.test(to);
        return !MAY_IMPORT[from].some((allowed) => to === allowed || i.target.startsWith(allowed));
      })
      .map((i) => `${i.from} → ${i.target}`);
    expect(wrong).toEqual([]);
  });
  test('no import cycles between files', () => {
    const graph = new Map<string, string[]>();
    for (const i of imports) graph.set(i.from, [...(graph.get(i.from) ?? []), i.target]);
    const state = new Map<string, 'open' | 'done'>();
    const cycles: string[] = [];
    const visit = (file: string, path: string[]) => {
      if (state.get(file) === 'done') return;
      if (state.get(file) === 'open') {
        cycles.push([...path.slice(path.indexOf(file)), file].join(' → '));
        return;
      }
      state.set(file, 'open');
      for (const next of graph.get(file) ?? []) visit(next, [...path, file]);
      state.set(file, 'done');
    };
    for (const file of graph.keys()) visit(file, []);
    expect(cycles).toEqual([]);
  });
});

describe('the core is pure', () => {
  const core = all.filter((f) => CORE_ROOMS.includes(roomOf(f)));
  test('no clock, chance, file, network or environment in the core rooms', () => {
    const banned = /\b(Date\.now|new Date\(|Math\.random|process\.\w|fetch\(|setTimeout|performance\.now)/;
    const wrong = core.flatMap((f) =>
      readFileSync(join(root, f), 'utf8')
        .split('\n')
        .flatMap((line, k) =>
          banned.test(line) && !/^\s*(\*|\/\/)/.test(line) ? [`${f}:${k + 1} ${line.trim()}`] : [],
        ),
    );
    expect(wrong).toEqual([]);
    expect(
      imports
        .filter((i) => core.includes(i.from) && i.target.startsWith('node:'))
        .map((i) => `${i.from} → ${i.target}`),
    ).toEqual([]);
  });
  test('only numeric imports numeric packages', () => {
    const numeric = imports.filter((i) => /^ml-/.test(i.target) && roomOf(i.from) !== 'jobs/numeric');
    expect(numeric.map((i) => i.from)).toEqual([]);
  });
});

describe('rooms stay small', () => {
  /** Files over 400 lines, each with its reason. */
  const LONG: Record<string, string> = { 'api/client-types.ts': 'written by a program from the OpenAPI document' };
  test('no file over 400 lines but the listed ones', () => {
    const long = all.filter((f) => readFileSync(join(root, f), 'utf8').split('\n').length > 400 && !(f in LONG));
    expect(long).toEqual([]);
  });
});

describe('the database is written through one door', () => {
  test('no insert, update or delete on database.read', () => {
    const wrong = all.flatMap((f) =>
      /\bread\s*\.\s*(insert|update|delete)\b/.test(readFileSync(join(root, f), 'utf8')) ? [f] : [],
    );
    expect(wrong).toEqual([]);
  });
});

describe('the test generator is independent', () => {
  test('test/study/generator names nothing outside itself but node and test tools', () => {
    const files = sources('test/study/generator');
    const wrong = files.flatMap((f) =>
      [...readFileSync(join(root, f), 'utf8').matchAll(/from '([^']+)'/g)]
        .map((m) => m[1])
        .filter((name) => name.startsWith('..'))
        .map((name) => `${f} → ${name}`),
    );
    expect(files.length).toBeGreaterThan(5);
    expect(wrong).toEqual([]);
  });
});
