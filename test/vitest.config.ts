import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';
import { ValidationReporter } from './validation/reporter.ts';

const root = fileURLToPath(new URL('..', import.meta.url));

export default defineConfig({
  root,
  oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } },
  test: {
    include: ['test/**/*.test.ts', 'test/**/*.test.tsx'],
    testTimeout: 20_000,
    pool: 'forks',
    // Files share their worker's modules, which hold hardly any state: loading them anew for each file took a third of the time.
    isolate: false,
    restoreMocks: true,
    maxWorkers: 2,
    reporters: ['default', new ValidationReporter('compare')],
  },
});
