import { describe, expect, test } from 'vitest';
import { createRandom } from '../../jobs/numeric/random.ts';
import {
  applyResponse,
  arrheniusLawAt,
  followProgramme,
  linearRamp,
  type SimulatedInstrument,
  type SimulatedMaterial,
  simulateScan,
} from '../../jobs/simulate/index.ts';

const material: SimulatedMaterial = {
  law: arrheniusLawAt(200_000, 650, 0.2),
  avramiExponent: 3,
  enthalpyJPerKg: 80_000,
};
const plain: SimulatedInstrument = {
  offsetK: 0,
  shiftS: 0,
  responseS: 0,
  exotherm: 'up',
  noiseFraction: 0,
  drift: { linear: 0, quadratic: 0 },
  stepS: 0.25,
};
const ramp = linearRamp(480, 720, 0.2);
const MASS_KG = 8e-6;

const sum = (values: Float64Array): number => values.reduce((a, b) => a + b, 0);
const centroid = (x: Float64Array, weight: Float64Array): number => sum(x.map((v, i) => v * weight[i])) / sum(weight);

describe('a sample that trails the programme', () => {
  test('trails a ramp by rate × time constant once it is steady, and a hold by nothing', () => {
    const follower = followProgramme(
      [
        [0, 500],
        [100, 600],
        [200, 600],
      ],
      4,
    );
    expect(600 - follower.sampleK(100)).toBeCloseTo(4 * (1 - Math.exp(-25)), 10);
    expect(600 - follower.sampleK(200)).toBeCloseTo(4 * Math.exp(-25), 10);
    expect(follower.furnaceK(50)).toBeCloseTo(550, 12);
  });

  test('obeys dT/dt = (T_programme − T)/τ (checked by central difference)', () => {
    const follower = followProgramme(
      [
        [0, 500],
        [30, 560],
        [60, 560],
        [80, 540],
      ],
      7,
    );
    for (const t of [1, 12, 29, 31, 45, 61, 79]) {
      const h = 1e-4;
      const slope = (follower.sampleK(t + h) - follower.sampleK(t - h)) / (2 * h);
      expect(slope).toBeCloseTo((follower.furnaceK(t) - follower.sampleK(t)) / 7, 6);
    }
  });

  test('refuses times that do not ascend', () => {
    expect(() =>
      followProgramme(
        [
          [0, 500],
          [0, 510],
        ],
        1,
      ),
    ).toThrow('must ascend');
    expect(() => followProgramme([[0, 500]], 1)).toThrow('two corners');
  });
});

describe('first-order response', () => {
  const timeS = Float64Array.from({ length: 4001 }, (_, i) => i * 0.05);

  test('of a ramp is the ramp delayed by τ after the transient (closed form)', () => {
    const out = applyResponse(timeS, timeS, 3);
    for (const [i, t] of timeS.entries()) expect(out[i]).toBeCloseTo(t - 3 * (1 - Math.exp(-t / 3)), 9);
  });

  test('of a bell keeps the area and moves the time centroid by exactly τ (moments of a convolution)', () => {
    const bell = timeS.map((t) => Math.exp(-(((t - 80) / 6) ** 2)));
    const out = applyResponse(timeS, bell, 4);
    expect(sum(out) / sum(bell)).toBeCloseTo(1, 6);
    expect(centroid(timeS, out) - centroid(timeS, bell)).toBeCloseTo(4, 3);
    expect(Math.max(...out)).toBeLessThan(0.95 * Math.max(...bell));
  });
});

describe('a simulated scan', () => {
  test('its area is mass × enthalpy, its direction the instrument’s', () => {
    const up = simulateScan(material, MASS_KG, plain, ramp);
    const down = simulateScan(material, MASS_KG, { ...plain, exotherm: 'down' }, ramp);
    expect(sum(up.heatFlowW) * plain.stepS).toBeCloseTo(MASS_KG * material.enthalpyJPerKg, 8);
    expect(up.conversion.at(-1)).toBeCloseTo(1, 9);
    expect(down.heatFlowW).toEqual(up.heatFlowW.map((w) => -w));
  });

  test('lag and offset move the measured centroid by offset + (shift + response) × rate', () => {
    const lagging = { ...plain, offsetK: 0.7, shiftS: 2, responseS: 1.5 };
    const a = simulateScan(material, MASS_KG, plain, ramp);
    const b = simulateScan(material, MASS_KG, lagging, ramp);
    const moved = centroid(b.temperatureK, b.heatFlowW) - centroid(a.temperatureK, a.heatFlowW);
    expect(moved).toBeCloseTo(0.7 + 3.5 * 0.2, 3);
  });

  test('the glass-transition step is endothermic, of height mass × Δcp × rate, half way at its midpoint for the rate', () => {
    const glass = { temperatureK: 560, rateKPerS: 0.02, risePerDecadeK: 4, widthK: 1.5, stepJPerKgK: 300 };
    const { sampleK, heatFlowW } = simulateScan({ ...material, glassTransition: glass }, MASS_KG, plain, ramp);
    const at = (kelvin: number) => heatFlowW[sampleK.findIndex((k) => k >= kelvin)];
    const step = MASS_KG * 300 * 0.2;
    expect(at(580) / -step).toBeCloseTo(1, 2);
    expect(at(564) / -step).toBeCloseTo(0.5, 2);
    expect(at(540) / -step).toBeCloseTo(0, 2);
  });

  test('noise and drift are fractions of the peak height', () => {
    const clean = simulateScan(material, MASS_KG, plain, ramp);
    const height = Math.max(...clean.heatFlowW);
    const drifting = simulateScan(material, MASS_KG, { ...plain, drift: { linear: 0.05, quadratic: -0.02 } }, ramp);
    expect((drifting.heatFlowW.at(-1)! - clean.heatFlowW.at(-1)!) / height).toBeCloseTo(0.03, 9);
    const noisy = simulateScan(material, MASS_KG, { ...plain, noiseFraction: 0.003 }, ramp, createRandom('a1'));
    const residual = noisy.heatFlowW.map((w, i) => (w - clean.heatFlowW[i]) / height);
    const spread = Math.sqrt(sum(residual.map((r) => r * r)) / residual.length);
    expect(spread).toBeGreaterThan(0.0028);
    expect(spread).toBeLessThan(0.0032);
    const again = simulateScan(material, MASS_KG, { ...plain, noiseFraction: 0.003 }, ramp, createRandom('a1'));
    expect(again.heatFlowW).toEqual(noisy.heatFlowW);
  });
});
