import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { expect, test } from 'vitest';

const root = fileURLToPath(new URL('../..', import.meta.url));
const read = (path: string): string => readFileSync(join(root, path), 'utf8');

interface Locked {
  license?: string;
  dev?: boolean;
}

const PERMISSIVE = [
  'MIT',
  'ISC',
  'Apache-2.0',
  'BSD-3-Clause',
  '0BSD',
  'CC0-1.0',
  'BlueOak-1.0.0',
  'MIT OR Apache-2.0',
];
/** Tools that are run and not shipped. */
const TOOLS = [
  'MPL-2.0',
  'LGPL-3.0-or-later',
  'Apache-2.0 AND LGPL-3.0-or-later',
  'Apache-2.0 AND LGPL-3.0-or-later AND MIT',
];

test('every package states a licence that goes with MIT; what is shipped, a permissive one', () => {
  const { packages } = JSON.parse(read('package-lock.json')) as { packages: Record<string, Locked> };
  const others = Object.entries(packages).filter(([path]) => path !== '');
  const wrong = others.filter(([, { license = '', dev }]) => ![...PERMISSIVE, ...(dev ? TOOLS : [])].includes(license));
  expect(wrong.map(([path, { license }]) => `${path}: ${license}`)).toEqual([]);
  expect(others.length).toBeGreaterThan(50);
});

test('every dependency is pinned and stands in DEVELOPERS with its reason', () => {
  const { dependencies, devDependencies } = JSON.parse(read('package.json'));
  for (const version of Object.values({ ...dependencies, ...devDependencies }))
    expect(version).toMatch(/^\d+\.\d+\.\d+$/);
  const [, table] = /## Dependencies\n[\s\S]*?\n(\|[\s\S]*?)\n\n/.exec(read('DEVELOPERS.md')) ?? [];
  const named = table
    .split('\n')
    .slice(2)
    .flatMap((row) =>
      row
        .split('|')[1]
        .split(',')
        .map((name) => name.trim()),
    );
  expect(named.sort()).toEqual(Object.keys(dependencies).sort());
});
