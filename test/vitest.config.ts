import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';
import { ValidationReporter } from './validation/reporter.ts';

const root = fileURLToPath(new URL('..', import.meta.url));
const BROWSER = 'test/browser/**';

const common = { root, oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } } } as const;

export default defineConfig({
  ...common,
  test: {
    maxWorkers: 2,
    reporters: ['default', new ValidationReporter('compare')],
    projects: [
      {
        ...common,
        test: {
          name: 'program',
          pool: 'forks',
          include: ['test/**/*.test.ts', 'test/**/*.test.tsx'],
          exclude: [BROWSER],
          testTimeout: 20_000,
        },
      },
      {
        ...common,
        test: {
          name: 'browser',
          pool: 'forks',
          include: [`${BROWSER}/*.test.ts`],
          globalSetup: 'test/browser/prepare.ts',
          // What a page shows is waited for; how long that takes depends on the machine and is no matter of these tests.
          testTimeout: 300_000,
          hookTimeout: 120_000,
          expect: { poll: { timeout: 60_000 } },
        },
      },
    ],
  },
});
