import { describe, expect, test } from 'vitest';
import { drawWeights, type ScatterModel } from '../../jobs/kinetics/monte-carlo.ts';
import { seededRandom } from '../study/generator/index.ts';

/** Four scans, the first two on a furnace with 8 degrees of freedom behind its scatter, the others on a chip with 5. */
const model = (instruments: number) =>
  ({
    data: { n: 4, instrument: [0, 0, 1, 1], instruments: Array.from({ length: instruments }) },
    curves: Uint16Array.of(1, 3),
    weights: Float64Array.of(1.8, 1.8, 0.2, 0.2),
    sigmaK: Float64Array.of(0.2, 0.6),
    scatterDegrees: Float64Array.of(8, 5),
  }) as unknown as ScatterModel;
const given = () => ({
  weights: Float64Array.of(1.8, 1.8, 0.2, 0.2),
  curveWeights: Float64Array.of(1.8, 0.2),
  curveSigmaK: Float64Array.of(0.2, 0.6),
});

describe('weights of a draw', () => {
  test('σ̂²/σ² has the mean 1 and the variance 2/ν of χ²/ν; weight and scatter move together, scans of one instrument alike', () => {
    const random = seededRandom('weights');
    const ratios = [[], []] as number[][];
    for (let d = 0; d < 20000; d++) {
      const out = given();
      drawWeights(model(2), random, out);
      expect(out.weights[0]).toBe(out.weights[1]);
      expect(out.curveWeights).toEqual(Float64Array.of(out.weights[1], out.weights[3]));
      for (const at of [0, 1]) {
        const ratio = (out.curveSigmaK[at] / model(2).sigmaK[at]) ** 2;
        expect(out.curveWeights[at] * ratio).toBeCloseTo(given().curveWeights[at], 12);
        ratios[at].push(ratio);
      }
    }
    for (const [at, degrees] of [8, 5].entries()) {
      const mean = ratios[at].reduce((a, b) => a + b, 0) / 20000;
      const variance = ratios[at].reduce((a, b) => a + (b - mean) ** 2, 0) / 20000;
      expect(Math.abs(mean - 1)).toBeLessThan(0.02);
      expect(Math.abs((variance * degrees) / 2 - 1)).toBeLessThan(0.08);
    }
  });
  test('one instrument: as given, and no chance used up', () => {
    const out = given();
    const [a, b] = [seededRandom('same'), seededRandom('same')];
    drawWeights(model(1), a, out);
    expect(out).toEqual(given());
    expect(a.normal()).toBe(b.normal());
  });
});
