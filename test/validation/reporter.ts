import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import type { Reporter, TestModule, Vitest } from 'vitest/node';
import { fileOfLine, lineOf, type PlacedCheck, writeChapter } from './chapter.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
export const CHAPTER = `${root}test/VALIDATION.md`;

/**
 * Collects what `validate` and `leaveTable` left in the tests. `write`: makes the chapter of it. `compare`: every test file that ran whole must
 * have just its lines in the chapter, and its tables; otherwise the run fails.
 */
export class ValidationReporter implements Reporter {
  #isFiltered = false;

  constructor(private readonly mode: 'write' | 'compare') {}

  onInit(vitest: Vitest): void {
    this.#isFiltered = vitest.config.testNamePattern !== undefined;
  }

  onTestRunEnd(modules: readonly TestModule[]): void {
    const ran = modules.map(collect);
    if (this.mode === 'write') {
      if (modules.some((module) => module.state() !== 'passed')) return;
      writeFileSync(
        CHAPTER,
        writeChapter(
          ran.flatMap((m) => m.checks),
          ran.flatMap((m) => m.tables),
        ),
      );
      process.stdout.write(`written: ${CHAPTER}\n`);
      return;
    }
    if (this.#isFiltered) return;
    const kept = existsSync(CHAPTER) ? readFileSync(CHAPTER, 'utf8') : '';
    const lines = kept.split('\n');
    const stale = ran
      .filter(({ whole, checks, tables }) => whole && (checks.length > 0 || tables.length > 0))
      .filter(({ file, checks, tables }) => {
        const now = checks.map(lineOf).sort();
        const then = lines.filter((line) => fileOfLine(line) === file).sort();
        return (
          now.join('\n') !== then.join('\n') ||
          tables.some(({ text }) => !kept.includes(text.replaceAll(/^#+ /gm, '#### ')))
        );
      });
    if (stale.length === 0) return;
    process.exitCode = 1;
    process.stderr.write(
      `test/VALIDATION.md is not what these tests give now: ${stale.map(({ file }) => file).join(', ')}; look at the change, then: npm run validation\n`,
    );
  }
}

/** What a test file left, and whether all of its tests ran and passed. */
function collect(module: TestModule) {
  const file = module.moduleId.slice(root.length);
  const tests = [...module.children.allTests()];
  const checks: PlacedCheck[] = tests.flatMap((test) =>
    (test.meta().validation ?? []).map((check) => ({ ...check, file })),
  );
  const tables = tests.flatMap((test) => test.meta().simulated ?? []);
  // A test that is left out by choice (`.skipIf`) leaves nothing.
  const whole =
    module.state() === 'passed' &&
    tests.every((test) => test.result().state === 'passed' || test.options.mode === 'skip');
  return { file, checks, tables, whole };
}
