import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { startVitest } from 'vitest/node';
import { ValidationReporter } from './reporter.ts';

/** Runs every test file that leaves checks or tables, and writes test/VALIDATION.md from them. */
const root = fileURLToPath(new URL('../..', import.meta.url));
const files = readdirSync(`${root}test`, { recursive: true, encoding: 'utf8' })
  .map((file) => `test/${file}`)
  .filter((file) => file.endsWith('.test.ts'))
  .filter((file) =>
    /from '[./]*validation\/validate\.ts'|from '\.\/validate\.ts'/.test(readFileSync(`${root}${file}`, 'utf8')),
  );
const vitest = await startVitest('test', files, {
  config: `${root}test/vitest.config.ts`,
  root,
  watch: false,
  maxWorkers: 1,
  reporters: ['default', new ValidationReporter('write')],
});
await vitest.close();
