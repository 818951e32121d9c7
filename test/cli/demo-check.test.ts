import { describe, expect, test } from 'vitest';
import { compareWithTruth, type DemoResults } from '../../jobs/cli/demo-check.ts';
import { HEADLINES } from '../../jobs/cli/headline.ts';
import type { PlantedFlaw, SampleTruth } from '../../jobs/simulate/index.ts';
import type { ResultRow } from '../../jobs/store/index.ts';

const straight: SampleTruth = {
  sample: 'straight',
  description: '',
  avramiExponent: 3,
  enthalpyJPerG: 50,
  scanCount: 8,
  energyKJPerMol: 200,
  localEnergies: [{ temperatureK: 600, energyKJPerMol: 200 }],
};
const bent: SampleTruth = {
  ...straight,
  sample: 'bent',
  energyKJPerMol: undefined,
  localEnergies: [
    { temperatureK: 420, energyKJPerMol: 260 },
    { temperatureK: 540, energyKJPerMol: 150 },
  ],
};
const flaws: PlantedFlaw[] = [
  { code: 'decade-gap', sample: 'bent', sentence: 'a missing decade' },
  { code: 'file-damaged', sample: 'straight', file: 'a.txt', sentence: 'a damaged file' },
];

const rowsOf = (sample: string, energy: number, exponent: number): ResultRow[] =>
  HEADLINES.map(({ quantity, method }) => {
    const value = quantity === 'activation_energy' ? energy : exponent;
    const bounds = { lower95: value * 0.98, upper95: value * 1.02 };
    return {
      sample,
      event: 1,
      quantity,
      method,
      value,
      ...bounds,
      conversion: null,
      temperature_K: null,
      interval: 'monte_carlo',
      variant: '',
    };
  });

const results = (energy: number, exponent: number, bentEnergy: number, ...without: string[]): DemoResults => ({
  parameters: [...rowsOf('straight', energy, exponent), ...rowsOf('bent', bentEnergy, 2.5)].filter(
    (row) => !without.includes(String(row.method)),
  ),
  flags: [{ code: 'file-damaged', file: 'a.txt', sample: null }],
  gaps: [{ code: 'decade-gap', sample: 'bent' }],
});

describe('the demo holds its results against the truth', () => {
  test('all within 2 % (energy) and 5 % (exponent): no failure, deviations printed', () => {
    const { text, failures } = compareWithTruth([straight, bent], flaws, results(203.9, 2.86, 200));
    expect(failures).toEqual([]);
    expect(text).toContain('+1.95 %');
    expect(text).toContain('−4.67 %');
    expect(text).toContain('150–260 kJ/mol');
    expect(text).toContain('within');
    expect(text).toContain('260 at 420 K, 150 at 540 K');
    for (const line of text.split('\n')) expect(line.length).toBeLessThanOrEqual(100);
  });

  test('too far off, missing, or outside the local energies of a bent law: each a failure', () => {
    expect(compareWithTruth([straight], [], results(204.1, 3, 200)).failures).toHaveLength(4);
    expect(compareWithTruth([straight], [], results(200, 3.16, 200)).failures).toEqual([
      'straight: avrami_exponent by jmak is off by +5.33 %',
    ]);
    expect(compareWithTruth([bent], [], results(200, 3, 266)).failures).toHaveLength(4);
    expect(compareWithTruth([straight], [], results(200, 3, 200, 'friedman')).failures).toEqual([
      'straight: no activation_energy by friedman',
    ]);
  });

  test('a planted flaw must be flagged on its own file or sample', () => {
    const found = results(200, 3, 200);
    expect(compareWithTruth([], flaws, found).failures).toEqual([]);
    expect(
      compareWithTruth([], flaws, { ...found, gaps: [{ code: 'decade-gap', sample: 'straight' }] }).failures,
    ).toEqual(['planted flaw not flagged: decade-gap on bent']);
    expect(
      compareWithTruth([], flaws, { ...found, flags: [{ code: 'file-damaged', file: 'b.txt' }] }).failures,
    ).toEqual(['planted flaw not flagged: file-damaged on a.txt']);
  });
});
