import { expect, test } from 'vitest';
import { compareGenerators } from './generators-agree.ts';

test('two generators written apart agree on α(t) and T(t), noise-free, from 0.03 to 30 000 K/s', () => {
  const agreements = compareGenerators();
  expect(agreements).toHaveLength(10);
  for (const { name, rateKPerS, conversionDifference, temperatureDifferenceK } of agreements) {
    const where = `${name} at ${rateKPerS} K/s`;
    expect(conversionDifference, where).toBeLessThan(1e-6);
    expect(temperatureDifferenceK, where).toBeLessThan(1e-6);
  }
});
