import { expect, test } from 'vitest';
import { readMutated } from './read-mutated.ts';

// The whole table: `npm run study -- mutated-files` (20 000 files).
test('400 mutated files are read soundly or refused with a reason, none over 2 s', () => {
  for (let index = 0; index < 400; index++) {
    const { wrong, seconds } = readMutated('test', index);
    expect(wrong, `file ${index} of seed test`).toBeUndefined();
    expect(seconds, `file ${index} of seed test`).toBeLessThan(2);
  }
});
