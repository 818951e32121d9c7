import { describe, expect, test } from 'vitest';
import { type DiagramLine, drawHeating } from '../../jobs/forecast/index.ts';
import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT as R } from '../../schema/wire/units.ts';
import { exactModelFree, LAW, sourceOf, straightLaw } from './sources.ts';

// Exact synthetic: SciPy 1.17.1, test/reference/scipy/forecast_profiles.py.
const CRITICAL = 5.936772450986e3;
const HEATED_K = 787.497255926;
const ENERGY = 250e3;
const straight = { ...straightLaw(ENERGY, 36, 3, 600, 700), frozenBelowK: 600 };
const melting = { meltingK: 1000, enthalpyJPerMol: 20e3 };
/** t(0.975, 8), any table of Student's t. */
const T_8 = 2.306004;

const lineOf = (source: ForecastSource, method: string, conversion: number, rates?: number[]): DiagramLine =>
  drawHeating(source, rates, [conversion]).find((l) => l.method === method)!;

const spreadOf = (values: ArrayLike<number>): number => {
  const all = Array.from(values);
  const mean = all.reduce((a, b) => a + b, 0) / all.length;
  return Math.sqrt(all.reduce((a, b) => a + (b - mean) ** 2, 0) / (all.length - 1));
};

describe('constant heating by the shared law', () => {
  const source = sourceOf(straight, { sdExponent: 0.02 }, { melting });
  test('the temperature of α = 0.5 at 2 K/s to 1e-6 K, rates in order', () => {
    const line = lineOf(source, 'shared_law', 0.5, [2, 0.2]);
    expect(Array.from(line.x, (x) => Number(x.toPrecision(12)))).toEqual([0.2, 2]);
    expect(Math.abs(line.y[1] - HEATED_K)).toBeLessThan(1e-6);
    expect(line.y[0]).toBeLessThan(line.y[1]);
    expect(line.beyondMeasuredK[1]).toBeCloseTo(HEATED_K - 700, 5);
  });
  test('the line of 1 % ends at melting with its critical rate, and so does every band', () => {
    const line = lineOf(source, 'shared_law', 0.01);
    const last = line.x.length - 1;
    expect(Math.abs(line.x[last] / CRITICAL - 1)).toBeLessThan(1e-6);
    expect(line.y[last]).toBeGreaterThan(melting.meltingK - 0.5);
    expect(line.upper[last]).toBe(melting.meltingK);
    expect(line.lower[last]).toBeLessThan(line.y[last] - 1);
    expect(Math.max(...line.upper)).toBe(melting.meltingK);
  });
  test('rates in whole decades, two beyond the measured ones', () => {
    // α = 0.5 at 600 and 700 K: 250 kJ/mol make 3.1 decades of rate between them.
    const { x, y } = lineOf(sourceOf(straight), 'shared_law', 0.5);
    const decades = Math.log10(x[x.length - 1] / x[0]);
    expect(Math.abs(decades - Math.round(decades))).toBeLessThan(1e-9);
    expect(decades).toBeGreaterThan(3.1 + 4);
    expect(decades).toBeLessThan(3.1 + 6);
    expect(y[0]).toBeLessThan(600);
  });
  // Of a rate factor alone the band is known: ln β moves as ln K does.
  test('a band of the rate factor alone lies where the estimate has the rates that far away', () => {
    const only = sourceOf(straight, { sdEnergy: 0, sdBend: 0, sdExponent: 0, sdLnRate: 0.2 });
    const half = T_8 * spreadOf(only.lawDraws!.lnRateAtMiddle);
    const ends = lineOf(only, 'shared_law', 0.5, [Math.exp(-half), 1, Math.exp(half)]);
    expect(Math.abs(ends.lower[1] - ends.y[0])).toBeLessThan(1e-3);
    expect(Math.abs(ends.upper[1] - ends.y[2])).toBeLessThan(1e-3);
  });
  test('first order in the draws is as wide as the lines of all draws', () => {
    const bent = sourceOf(LAW, { sdExponent: 0.1 }, { melting });
    const rates = [0.01, 1, 20];
    const line = lineOf(bent, 'shared_law', 0.01, rates);
    const { lnRateAtMiddle, energyJPerMol, bend, avramiExponent } = bent.lawDraws!;
    const drawn = Array.from(bend, (_, d) => {
      const law = {
        ...LAW,
        lnRateAtMiddle: lnRateAtMiddle[d],
        energyJPerMol: energyJPerMol[d],
        bend: bend[d],
        avramiExponent: avramiExponent[d],
      };
      return lineOf({ ...bent, law, lawDraws: undefined }, 'shared_law', 0.01, rates).y;
    });
    rates.forEach((_, i) => {
      const half = T_8 * spreadOf(drawn.map((y) => y[i]));
      expect((line.upper[i] - line.lower[i]) / (2 * half)).toBeGreaterThan(0.95);
      expect((line.upper[i] - line.lower[i]) / (2 * half)).toBeLessThan(1.05);
    });
  });
  test('below the frozen point the straight law bounds the band', () => {
    const frozen = lineOf(sourceOf(LAW), 'shared_law', 0.5, [1e-5]);
    expect(frozen.y[0]).toBeLessThan(LAW.frozenBelowK);
    expect(frozen.y[0] - frozen.lower[0]).toBeGreaterThan(3 * (frozen.upper[0] - frozen.y[0]));
  });
});

describe('constant heating without a model', () => {
  const free = (source: ForecastSource) => ({ ...source, law: undefined, lawDraws: undefined });
  const source = free(sourceOf(straight));
  test('one energy throughout: ∫K dT is β X^(1/n), by Simpson over 20 000 steps', () => {
    for (const [conversion, rate] of [
      [0.01, 0.3],
      [0.5, 0.3],
      [0.95, 20],
    ]) {
      const { y } = lineOf(source, 'model_free', conversion, [rate]);
      const steps = 20_000;
      let sum = 0;
      for (let i = 0; i <= steps; i++) {
        const T = 300 + ((y[0] - 300) * i) / steps;
        const weight = i === 0 || i === steps ? 1 : i % 2 === 1 ? 4 : 2;
        sum += (weight * Math.exp(36 - ENERGY / (R * T)) * (y[0] - 300)) / steps / 3;
      }
      expect(sum / (rate * (-Math.log1p(-conversion)) ** (1 / 3)) - 1).toBeCloseTo(0, 5);
    }
  });
  test('first order in the draws is as wide as the lines of all draws', () => {
    // An energy that falls with conversion, so that segments differ.
    const curve = exactModelFree(ENERGY, straight.lnRateAtMiddle, 3, straight.x0PerK);
    curve.energyJPerMol.forEach((E, k) => {
      curve.energyJPerMol[k] = E * (1.1 - 0.01 * k);
    });
    const base = sourceOf(straight, { sdEnergy: 6e3 });
    const fallen = { ...free(base), modelFree: curve };
    const { energyJPerMol, lnStep } = base.modelFreeDraws!;
    fallen.modelFreeDraws = { lnStep, energyJPerMol: energyJPerMol.map((E, i) => E * (1.1 - 0.01 * (i % 19))) };
    for (const conversion of [0.01, 0.5, 0.95]) {
      const rates = [1e-3, 1, 100];
      const line = lineOf(fallen, 'model_free', conversion, rates);
      const drawn = Array.from({ length: 100 }, (_, d) => {
        const own = (all: Float64Array) => all.slice(19 * d, 19 * (d + 1));
        const modelFree = { ...curve, energyJPerMol: own(fallen.modelFreeDraws!.energyJPerMol), lnStep: own(lnStep) };
        return lineOf({ ...fallen, modelFree, modelFreeDraws: undefined }, 'model_free', conversion, rates).y;
      });
      rates.forEach((_, i) => {
        const half = T_8 * spreadOf(drawn.map((y) => y[i]));
        expect((line.upper[i] - line.lower[i]) / (2 * half)).toBeGreaterThan(0.97);
        expect((line.upper[i] - line.lower[i]) / (2 * half)).toBeLessThan(1.03);
      });
    }
  });
  test('alone it chooses the rates as the law of the same process does, and an energy that is not positive draws nothing', () => {
    const byLaw = lineOf(sourceOf(straight), 'shared_law', 0.5);
    const alone = lineOf(source, 'model_free', 0.5);
    expect(Array.from(alone.x)).toEqual(Array.from(byLaw.x));
    expect(Math.abs(alone.y[15] - byLaw.y[15])).toBeLessThan(1e-3);
    const energyJPerMol = source.modelFree!.energyJPerMol.map((E, k) => (k === 3 ? -E : E));
    expect(drawHeating({ ...source, modelFree: { ...source.modelFree!, energyJPerMol } })).toEqual([]);
  });
});
