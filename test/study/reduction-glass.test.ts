import { expect, test } from 'vitest';
import { GLASS_CASES, reduceForGlass } from './reduction-glass.ts';

// The whole table: `npm run study -- reduction-glass`.
test.each(GLASS_CASES.filter(({ name }) => /settling|drift/.test(name)).map((of) => [of.name, of] as const))(
  '%s: no glass transition where there is none, and the one that there is',
  (_, of) => {
    let found = 0;
    for (let index = 0; index < 4; index++) {
      expect(reduceForGlass(of, false, 'test', index).found, `${index}`).toBe(false);
      const { error } = reduceForGlass(of, true, 'test', index);
      if (error === undefined) continue;
      expect(Math.abs(error), `${index}`).toBeLessThan(0.1);
      found++;
    }
    expect(found).toBeGreaterThanOrEqual(2);
  },
);
