import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  arrheniusLawAt,
  bentLawBetween,
  followProgramme,
  linearRamp,
  lnRateConstant,
  localEnergy,
  type RateLaw,
  simulateConversion,
} from '../../jobs/simulate/index.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';

/** α and dα/dt on a ramp, sampled every stepK around a temperature; the rows start far below so that X(start) is nil. */
function convertRamp(law: RateLaw, n: number, rate: number, centreK: number, halfWidthK: number, stepK: number) {
  const start = 0.55 * centreK;
  const { sampleK } = followProgramme(linearRamp(start, 1.2 * centreK, rate), 0);
  const inner = Math.round((2 * halfWidthK) / stepK);
  const temperatureK = Float64Array.from({ length: inner + 2 }, (_, i) =>
    i === 0 ? start : centreK - halfWidthK + (i - 1) * stepK,
  );
  const timeS = temperatureK.map((k) => (k - start) / rate);
  return { temperatureK, ...simulateConversion(law, n, timeS, sampleK) };
}

// Exact single-step JMAK peaks, E = 200 kJ/mol, K0 = 1e14 1/s, n = 3, R = 8.314462618; computed with 40 digits
// (mpmath), reference file isoconversional/B5_exact_JMAK_wide_rates.json: rate in K/s, Tp in K, α at Tp.
const EXACT_PEAKS = [
  [0.08333333333333333, 641.203923806, 0.626006241],
  [0.16666666666666666, 652.660183104, 0.625904014],
  [0.3333333333333333, 664.522607501, 0.625798398],
  [0.6666666666666666, 676.812805403, 0.625689227],
  [1.3333333333333333, 689.553924899, 0.625576321],
  [10, 729.390323442, 0.625225069],
  [100, 780.761079766, 0.624776004],
  [1000, 839.656485643, 0.624266449],
  [10000, 907.816735934, 0.623683634],
  [50000, 962.164076051, 0.623224115],
] as const;

describe('JMAK conversion', () => {
  test.each(EXACT_PEAKS)('peak at %d K/s: %d K, α %d', (rate, peakK, alphaAtPeak) => {
    const law: RateLaw = { kind: 'arrhenius', energyJPerMol: 200_000, lnPrefactor: Math.log(1e14) };
    const { temperatureK, conversion, ratePerS } = convertRamp(law, 3, rate, peakK, 0.05, 0.005);
    const top = ratePerS.indexOf(ratePerS.reduce((a, b) => Math.max(a, b)));
    const [y0, y1, y2] = [ratePerS[top - 1], ratePerS[top], ratePerS[top + 1]];
    const vertex = temperatureK[top] + (0.005 * (y0 - y2)) / (2 * (y0 - 2 * y1 + y2));
    expect(Math.abs(vertex - peakK)).toBeLessThan(2e-6);
    expect(Math.abs(conversion[11] - alphaAtPeak)).toBeLessThan(2e-9);
  });

  test('a hold follows 1 − exp(−(k t)^n) (closed form at constant temperature)', () => {
    const law = arrheniusLawAt(180_000, 600, 0.1);
    const { sampleK } = followProgramme(
      [
        [0, 590],
        [1000, 590],
      ],
      0,
    );
    const k = Math.exp(lnRateConstant(law, 590));
    for (const n of [0.7, 1, 2.5, 4]) {
      const timeS = Float64Array.from({ length: 101 }, (_, i) => (i * 2) / k / 100);
      const { conversion, ratePerS } = simulateConversion(law, n, timeS, sampleK);
      timeS.forEach((t, i) => {
        expect(Math.abs(conversion[i] - (1 - Math.exp(-((k * t) ** n))))).toBeLessThan(1e-12);
        if (i === 0) return;
        const rate = n * k * (k * t) ** (n - 1) * Math.exp(-((k * t) ** n));
        expect(Math.abs(ratePerS[i] / rate - 1)).toBeLessThan(1e-9);
      });
    }
  });

  test('n = 1 starts at rate K; no other exponent gives an unbounded row', () => {
    const law = arrheniusLawAt(180_000, 600, 0.1);
    const { sampleK } = followProgramme(linearRamp(590, 600, 1), 0);
    const start = (n: number) => simulateConversion(law, n, Float64Array.of(0, 1), sampleK).ratePerS[0];
    expect(start(1)).toBeCloseTo(Math.exp(lnRateConstant(law, 590)), 12);
    expect([start(0.5), start(3)]).toEqual([0, 0]);
    expect(() => start(0)).toThrow('above 0');
  });

  test('the conversion at a row does not depend on the rows before it', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 120_000, max: 350_000, noNaN: true }),
        fc.double({ min: 1, max: 4, noNaN: true }),
        fc.double({ min: -0.5, max: 0.5, noNaN: true }),
        (energy, n, bend) => {
          const law: RateLaw = {
            ...bentLawBetween(
              { temperatureK: 480, energyJPerMol: energy },
              { temperatureK: 620, energyJPerMol: 150_000 },
              0.1,
            ),
            bend,
          };
          const coarse = convertRamp(law, n, 0.5, 500, 20, 8);
          const fine = convertRamp(law, n, 0.5, 500, 20, 0.05);
          coarse.temperatureK.forEach((k, i) => {
            const j = fine.temperatureK.findIndex((x) => Math.abs(x - k) < 1e-9);
            expect(Math.abs(coarse.conversion[i] - fine.conversion[j])).toBeLessThan(1e-9);
          });
        },
      ),
      { seed: 11, numRuns: 25 },
    );
  });
});

describe('rate laws', () => {
  const bent = bentLawBetween(
    { temperatureK: 420, energyJPerMol: 260_000 },
    { temperatureK: 545, energyJPerMol: 150_000 },
    0.05,
  );

  test('the bent law has its stated local energies', () => {
    expect(localEnergy(bent, 420)).toBeCloseTo(260_000, 6);
    expect(localEnergy(bent, 545)).toBeCloseTo(150_000, 6);
  });

  test('E_loc = −R d ln K/d(1/T), by central difference', () => {
    for (const law of [bent, { ...bent, bend: 0 }, arrheniusLawAt(200_000, 500, 1)]) {
      for (const t of [400, 450, 500, 560]) {
        const h = 1e-8;
        const slope = (lnRateConstant(law, 1 / (1 / t + h)) - lnRateConstant(law, 1 / (1 / t - h))) / (2 * h);
        expect(-GAS_CONSTANT * slope).toBeCloseTo(localEnergy(law, t), -1);
      }
    }
  });

  test('the bent law without bend is Arrhenius, and continuous there', () => {
    const straight = { ...bent, bend: 0 };
    const nearly = { ...bent, bend: 1e-9 };
    const law: RateLaw = {
      kind: 'arrhenius',
      energyJPerMol: bent.energyJPerMol,
      lnPrefactor: bent.lnRateAtReference + bent.energyJPerMol / (GAS_CONSTANT * bent.referenceK),
    };
    for (const t of [400, 500, 600]) {
      expect(lnRateConstant(straight, t)).toBeCloseTo(lnRateConstant(law, t), 9);
      expect(lnRateConstant(nearly, t)).toBeCloseTo(lnRateConstant(law, t), 6);
    }
  });
});
