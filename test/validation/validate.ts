import { expect, TestRunner } from 'vitest';
import type { SourceName } from './sources.ts';

/** One number of the project beside the same number from elsewhere. */
export interface Check {
  method: string;
  /** What the number is, with its unit and its data set. */
  quantity: string;
  source: SourceName;
  expected: number;
  got: number;
  /** Largest difference that is no failure, in the unit of the number. */
  within: number;
}

declare module 'vitest' {
  interface TaskMeta {
    /** What the lines of the validation chapter are made from. */
    validation?: Check[];
    /** A table of the chapter: title and Markdown. */
    simulated?: { title: string; text: string };
  }
}

/** Asserts the number and leaves it for the validation chapter (test/VALIDATION.md), which is made of nothing but these calls. */
export function validate(check: Check): void {
  const test = TestRunner.getCurrentTest();
  if (!test) throw new Error('validate belongs inside a test');
  test.meta.validation = [...(test.meta.validation ?? []), check];
  const { method, quantity, expected, got, within } = check;
  expect(
    Math.abs(got - expected),
    `${method}, ${quantity}: ${got}, expected ${expected} ± ${within}`,
  ).toBeLessThanOrEqual(within);
}

/** Leaves a table of a simulation, made within the suite, for the validation chapter. */
export function leaveTable(title: string, text: string): void {
  TestRunner.getCurrentTest()!.meta.simulated = { title, text };
}
